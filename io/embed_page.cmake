# Puts the page's style sheet and script into a C++ source, so that the program needs no file at run time.
foreach(kind css js)
  set(file ${CMAKE_CURRENT_SOURCE_DIR}/page/page.${kind})
  set_property(DIRECTORY APPEND PROPERTY CMAKE_CONFIGURE_DEPENDS ${file})
  string(TOUPPER ${kind} name)
  file(READ ${file} IDLEWIRE_PAGE_${name})
endforeach()
configure_file(embedded_page.cpp.in embedded_page.cpp @ONLY)
