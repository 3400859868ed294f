# Builds and runs the consumer by one WAY, in a folder of its own outside the source tree.

cmake_minimum_required(VERSION 3.23)

set(folder "${WORK}/${WAY}")
set(consumer "${folder}/build/consumer")
file(REMOVE_RECURSE "${folder}")
foreach(file main.cpp json.cpp CMakeLists.txt)
  file(COPY "${CMAKE_CURRENT_LIST_DIR}/${file}" DESTINATION "${folder}")
endforeach()
file(MAKE_DIRECTORY "${folder}/build")

if(WAY MATCHES "pkg_config|plain")
  if(WAY STREQUAL "plain")
    set(flags "-I${WHET}/include")
    foreach(include IN LISTS SYSTEM_INCLUDES)
      list(APPEND flags -isystem "${include}")
    endforeach()
  else()
    file(GLOB pc "${WORK}/prefix/*/pkgconfig")
    set(ENV{PKG_CONFIG_PATH} "${pc}:$ENV{PKG_CONFIG_PATH}")
    execute_process(COMMAND "${PKG_CONFIG}" --cflags --libs "whet >= 0.1" OUTPUT_VARIABLE flags
                    COMMAND_ERROR_IS_FATAL ANY)
    separate_arguments(flags UNIX_COMMAND "${flags}")
  endif()
  execute_process(COMMAND "${CXX}" -std=c++20 "${folder}/main.cpp" ${flags} -o "${consumer}"
                  COMMAND_ERROR_IS_FATAL ANY)
else()
  execute_process(COMMAND "${CMAKE_COMMAND}" -S "${folder}" -B "${folder}/build" -G "${GENERATOR}"
                          "-DCMAKE_CXX_COMPILER=${CXX}" "-DCMAKE_PREFIX_PATH=${WORK}/prefix"
                          "-DWAY=${WAY}" "-DWHET=${WHET}" "-DJSON=${JSON}"
                  COMMAND_ERROR_IS_FATAL ANY)
  execute_process(COMMAND "${CMAKE_COMMAND}" --build "${folder}/build" COMMAND_ERROR_IS_FATAL ANY)
endif()

execute_process(COMMAND "${consumer}" OUTPUT_VARIABLE output COMMAND_ERROR_IS_FATAL ANY)
if(NOT output MATCHES "consumed 2 parameters")
  message(FATAL_ERROR "the consumer printed: ${output}")
endif()
