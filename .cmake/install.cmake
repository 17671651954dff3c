# The program, and a package that another project finds with find_package(idlewire).
set(package_dir ${CMAKE_INSTALL_LIBDIR}/cmake/idlewire)

# Target names are short inside the house; among other people's libraries a file says whose it is.
foreach(library engine netlists io)
  set_target_properties(${library} PROPERTIES OUTPUT_NAME idlewire_${library})
endforeach()

install(TARGETS engine netlists io EXPORT idlewire-targets
  ARCHIVE DESTINATION ${CMAKE_INSTALL_LIBDIR}
  FILE_SET HEADERS DESTINATION ${CMAKE_INSTALL_INCLUDEDIR}/idlewire)
install(TARGETS idlewire RUNTIME DESTINATION ${CMAKE_INSTALL_BINDIR})
install(EXPORT idlewire-targets NAMESPACE idlewire:: DESTINATION ${package_dir})

configure_package_config_file(${CMAKE_CURRENT_LIST_DIR}/idlewire-config.cmake.in
  ${PROJECT_BINARY_DIR}/idlewire-config.cmake INSTALL_DESTINATION ${package_dir})
write_basic_package_version_file(${PROJECT_BINARY_DIR}/idlewire-config-version.cmake
  COMPATIBILITY SameMinorVersion)
install(FILES ${PROJECT_BINARY_DIR}/idlewire-config.cmake ${PROJECT_BINARY_DIR}/idlewire-config-version.cmake
  ${PROJECT_SOURCE_DIR}/engine/cmake/FindKLU.cmake ${PROJECT_SOURCE_DIR}/io/cmake/FindXlsxWriter.cmake
  DESTINATION ${package_dir})
