# SPDX-License-Identifier: GPL-3.0-or-later
# The fit against SciPy and R: skipped only where those are not installed.
add_executable(fit_driver fit_driver.c)
target_include_directories(fit_driver PRIVATE "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
target_link_libraries(fit_driver PRIVATE chainend_static GSL::gsl m ce_flags)

# Debian's own Python first: SciPy comes with it.
find_program(CE_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
find_program(CE_PYTHON NAMES python3)
find_program(CE_RSCRIPT NAMES Rscript)
foreach(with IN ITEMS odr nls)
  if(with STREQUAL "odr" AND CE_PYTHON)
    set(command "${CE_PYTHON}" "${CMAKE_CURRENT_LIST_DIR}/fit_odr.py" $<TARGET_FILE:fit_driver>)
  elseif(with STREQUAL "nls" AND CE_RSCRIPT)
    set(command "${CE_RSCRIPT}" "${CMAKE_CURRENT_LIST_DIR}/fit_nls.R" $<TARGET_FILE:fit_driver>)
  else()
    set(command sh -c "exit 77")
  endif()
  add_test(NAME reference.fit.${with} COMMAND ${command})
  set_tests_properties(reference.fit.${with} PROPERTIES SKIP_RETURN_CODE 77)
endforeach()
