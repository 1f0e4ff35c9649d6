# SPDX-License-Identifier: GPL-3.0-or-later
# Warnings and hardening for our own code only: never exported, never errors except in the presets.
include(CheckPIESupported)
check_pie_supported(LANGUAGES C)
add_library(ce_flags INTERFACE)
target_compile_options(ce_flags INTERFACE
  -Wall -Wextra -Wpedantic -Wconversion -Wsign-conversion -Wshadow -Wvla -Wformat=2
  -Wstrict-prototypes -Wmissing-prototypes -Wcast-qual -Wdouble-promotion -Wundef -Wdate-time
  $<$<C_COMPILER_ID:GNU>:-Wlogical-op> $<$<C_COMPILER_ID:GNU>:-Wduplicated-cond>
  # The same digits from gcc and clang: no fused multiply-add behind our back.
  -ffp-contract=off
  -fstack-protector-strong -fstack-clash-protection
  # No machine paths in the binaries, so that two builds of one source are one file.
  "-ffile-prefix-map=${PROJECT_SOURCE_DIR}/=")
if(NOT CMAKE_C_FLAGS MATCHES "sanitize")
  target_compile_options(ce_flags INTERFACE
    "$<$<CONFIG:Release,RelWithDebInfo>:-U_FORTIFY_SOURCE;-D_FORTIFY_SOURCE=3>")
endif()
target_link_options(ce_flags INTERFACE LINKER:-z,relro LINKER:-z,now LINKER:--as-needed)
target_compile_definitions(ce_flags INTERFACE _GNU_SOURCE)
