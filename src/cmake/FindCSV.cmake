# SPDX-License-Identifier: GPL-3.0-or-later
# libcsv ships neither a CMake package nor a .pc file. Defines the target CSV::csv.
find_path(CSV_INCLUDE_DIR csv.h)
find_library(CSV_LIBRARY csv)
mark_as_advanced(CSV_INCLUDE_DIR CSV_LIBRARY)
include(FindPackageHandleStandardArgs)
find_package_handle_standard_args(CSV REQUIRED_VARS CSV_LIBRARY CSV_INCLUDE_DIR)
if(CSV_FOUND AND NOT TARGET CSV::csv)
  add_library(CSV::csv UNKNOWN IMPORTED)
  set_target_properties(CSV::csv PROPERTIES
    IMPORTED_LOCATION "${CSV_LIBRARY}" INTERFACE_INCLUDE_DIRECTORIES "${CSV_INCLUDE_DIR}")
endif()
