# Puts the catalogue's YAML files into a C++ source, so that the program needs no file at run time. The order is that in
# which they are read: what a file refers to stands in an earlier one.
set(IDLEWIRE_CATALOGUE "")
foreach(name materials wires_awg wires_metric cables raceways supplies instruments loads)
  set(file ${CMAKE_CURRENT_SOURCE_DIR}/catalogue/${name}.yaml)
  set_property(DIRECTORY APPEND PROPERTY CMAKE_CONFIGURE_DEPENDS ${file})
  file(READ ${file} text)
  string(APPEND IDLEWIRE_CATALOGUE "      {\"${name}.yaml\", R\"catalogue(${text})catalogue\"},\n")
endforeach()
configure_file(embedded_catalogue.cpp.in embedded_catalogue.cpp @ONLY)
