# SPDX-License-Identifier: GPL-3.0-or-later
add_executable(estimate_coverage estimate_coverage.c)
target_link_libraries(estimate_coverage PRIVATE chainend_static GSL::gsl m ce_flags)
target_include_directories(estimate_coverage PRIVATE "${PROJECT_SOURCE_DIR}/src" "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
