# SPDX-License-Identifier: GPL-3.0-or-later
# Run by hand (DEVELOPERS.md), not by ctest: it measures.
add_executable(simulate_speed simulate_speed.c)
target_include_directories(simulate_speed PRIVATE "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
target_link_libraries(simulate_speed PRIVATE chainend_static GSL::gsl m ce_flags)
