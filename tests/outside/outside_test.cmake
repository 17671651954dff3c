# Installs idlewire into a folder of the build, then configures, builds and runs the project beside
# this file against that install. Called by ctest as
#   cmake -DBUILD_DIR=... -DCONFIG=... -DGENERATOR=... -DCXX=... -DCXX_FLAGS=... -P outside_test.cmake
set(here ${CMAKE_CURRENT_LIST_DIR})
set(work ${BUILD_DIR}/outside)
file(REMOVE_RECURSE ${work})

function(step)
  execute_process(COMMAND ${ARGN} RESULT_VARIABLE result)
  if(NOT result EQUAL 0)
    message(FATAL_ERROR "failed (${result}): ${ARGN}")
  endif()
endfunction()

step(${CMAKE_COMMAND} --install ${BUILD_DIR} --config ${CONFIG} --prefix ${work}/prefix)
step(${CMAKE_COMMAND} -S ${here} -B ${work}/build -G ${GENERATOR} -DCMAKE_BUILD_TYPE=${CONFIG}
  -DCMAKE_CXX_COMPILER=${CXX} "-DCMAKE_CXX_FLAGS=${CXX_FLAGS}" -DCMAKE_PREFIX_PATH=${work}/prefix
  -DCMAKE_FIND_USE_PACKAGE_REGISTRY=OFF)
step(${CMAKE_COMMAND} --build ${work}/build)
step(${work}/build/coax)
step(${work}/prefix/bin/idlewire --version)
