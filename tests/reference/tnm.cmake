# SPDX-License-Identifier: GPL-3.0-or-later
# The simulator against the same model integrated with SciPy: skipped only where that is not installed.
find_program(CE_PYTHON NAMES python3 PATHS /usr/bin NO_DEFAULT_PATH)
find_program(CE_PYTHON NAMES python3)
if(CE_PYTHON)
  set(command "${CE_PYTHON}" "${CMAKE_CURRENT_LIST_DIR}/tnm_scipy.py" $<TARGET_FILE:chainend_program>)
else()
  set(command sh -c "exit 77")
endif()
add_test(NAME reference.simulate.tnm COMMAND ${command})
set_tests_properties(reference.simulate.tnm PROPERTIES SKIP_RETURN_CODE 77)
