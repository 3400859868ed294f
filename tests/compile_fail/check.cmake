# Compiles SOURCE, which must be refused: the text behind "// expect: " in its first line has to be
# in the first line of the compiler's output that holds an error.

cmake_minimum_required(VERSION 3.23)

file(READ "${SOURCE}" text)
if(NOT text MATCHES "^// expect: ([^\n]+)\n")
  message(FATAL_ERROR "${SOURCE}: the first line has to be '// expect: <text>'")
endif()
set(expected "${CMAKE_MATCH_1}")

set(flags -std=c++20 -fsyntax-only "-I${INCLUDE}")
foreach(folder IN LISTS SYSTEM_INCLUDES)
  list(APPEND flags -isystem "${folder}")
endforeach()
set(ENV{LC_ALL} C)
execute_process(COMMAND "${CXX}" ${flags} "${SOURCE}"
                RESULT_VARIABLE status OUTPUT_VARIABLE output ERROR_VARIABLE output)
if(status EQUAL 0)
  message(FATAL_ERROR "${SOURCE}: compiled, and ought to be refused with: ${expected}")
endif()
string(REGEX MATCH "[^\n]*error:[^\n]*" line "${output}")
string(FIND "${line}" "${expected}" place)
if(place EQUAL -1)
  message(FATAL_ERROR "${SOURCE}: the first error line lacks '${expected}':\n${line}\n---\n${output}")
endif()
message(STATUS "${line}")
