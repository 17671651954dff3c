# Finds KLU, the sparse LU of SuiteSparse, with what it stands on: AMD, BTF, COLAMD and the common
# configuration library. Distributions before SuiteSparse 7 ship no CMake package, so look for the files.
#
# Defines the imported target SuiteSparse::KLU. Hints: CMAKE_PREFIX_PATH or KLU_ROOT.
include(FindPackageHandleStandardArgs)

find_path(KLU_INCLUDE_DIR klu.h PATH_SUFFIXES suitesparse)
set(_klu_parts)
foreach(_klu_part klu amd btf colamd suitesparseconfig)
  find_library(KLU_${_klu_part}_LIBRARY ${_klu_part})
  mark_as_advanced(KLU_${_klu_part}_LIBRARY)
  list(APPEND _klu_parts KLU_${_klu_part}_LIBRARY)
endforeach()
mark_as_advanced(KLU_INCLUDE_DIR)

find_package_handle_standard_args(KLU REQUIRED_VARS KLU_INCLUDE_DIR ${_klu_parts})

if(KLU_FOUND AND NOT TARGET SuiteSparse::KLU)
  add_library(SuiteSparse::KLU UNKNOWN IMPORTED)
  set_target_properties(SuiteSparse::KLU PROPERTIES
    IMPORTED_LOCATION ${KLU_klu_LIBRARY}
    INTERFACE_INCLUDE_DIRECTORIES ${KLU_INCLUDE_DIR}
    INTERFACE_LINK_LIBRARIES
      "${KLU_amd_LIBRARY};${KLU_btf_LIBRARY};${KLU_colamd_LIBRARY};${KLU_suitesparseconfig_LIBRARY}")
endif()
