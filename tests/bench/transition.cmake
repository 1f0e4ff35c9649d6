# SPDX-License-Identifier: GPL-3.0-or-later
add_executable(transition_accuracy "${CMAKE_CURRENT_LIST_DIR}/transition_accuracy.c")
target_link_libraries(transition_accuracy PRIVATE chainend_static ce_flags m)
add_executable(transition_speed transition_speed.c)
target_link_libraries(transition_speed PRIVATE chainend_static GSL::gsl m ce_flags)
target_include_directories(transition_speed PRIVATE "${PROJECT_SOURCE_DIR}/include" "${PROJECT_BINARY_DIR}/include")
