# SPDX-License-Identifier: GPL-3.0-or-later
# Run by hand (DEVELOPERS.md), not by ctest: they measure.
foreach(bench IN ITEMS fit_speed fit_coverage)
  add_executable(${bench} ${bench}.c)
  target_include_directories(${bench} PRIVATE "${PROJECT_SOURCE_DIR}/src" "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
  target_link_libraries(${bench} PRIVATE chainend_static GSL::gsl m ce_flags)
endforeach()
