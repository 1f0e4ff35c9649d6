# SPDX-License-Identifier: GPL-3.0-or-later
include(CMakePackageConfigHelpers)
install(TARGETS chainend_shared chainend_static EXPORT chainend
  LIBRARY DESTINATION "${CMAKE_INSTALL_LIBDIR}" ARCHIVE DESTINATION "${CMAKE_INSTALL_LIBDIR}"
  FILE_SET HEADERS DESTINATION "${CMAKE_INSTALL_INCLUDEDIR}")
install(EXPORT chainend NAMESPACE chainend:: FILE chainend-targets.cmake
  DESTINATION "${CMAKE_INSTALL_LIBDIR}/cmake/chainend")
configure_package_config_file(cmake/chainend-config.cmake.in "${PROJECT_BINARY_DIR}/chainend-config.cmake"
  INSTALL_DESTINATION "${CMAKE_INSTALL_LIBDIR}/cmake/chainend")
write_basic_package_version_file("${PROJECT_BINARY_DIR}/chainend-config-version.cmake" COMPATIBILITY SameMinorVersion)
install(FILES "${PROJECT_BINARY_DIR}/chainend-config.cmake" "${PROJECT_BINARY_DIR}/chainend-config-version.cmake"
  cmake/FindCSV.cmake DESTINATION "${CMAKE_INSTALL_LIBDIR}/cmake/chainend")
# Relative to the .pc file, so that an installed tree may be moved.
file(RELATIVE_PATH CE_PREFIX_FROM_PC "/p/${CMAKE_INSTALL_LIBDIR}/pkgconfig" "/p")
configure_file(cmake/chainend.pc.in "${PROJECT_BINARY_DIR}/chainend.pc" @ONLY)
install(FILES "${PROJECT_BINARY_DIR}/chainend.pc" DESTINATION "${CMAKE_INSTALL_LIBDIR}/pkgconfig")
