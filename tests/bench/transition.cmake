# SPDX-License-Identifier: GPL-3.0-or-later
add_executable(transition_accuracy "${CMAKE_CURRENT_LIST_DIR}/transition_accuracy.c")
target_link_libraries(transition_accuracy PRIVATE chainend_static ce_flags m)
