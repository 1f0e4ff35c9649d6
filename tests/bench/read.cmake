# SPDX-License-Identifier: GPL-3.0-or-later
# By hand, with the preset "release" and -DCHAINEND_TESTS=ON: read_speed.py build/release/tests/bench/read_speed
add_executable(read_speed read_speed.c)
target_link_libraries(read_speed PRIVATE chainend_static GSL::gsl m ce_flags)
target_include_directories(read_speed PRIVATE "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
