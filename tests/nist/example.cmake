# The example that plans a repeat runs on every set, and refuses wrong use with status 2 and a
# reason:
#   cmake -DPROGRAM=... -P example.cmake

cmake_minimum_required(VERSION 3.23)

function(expect status words)
  execute_process(COMMAND "${PROGRAM}" ${ARGN} RESULT_VARIABLE got OUTPUT_VARIABLE output
                  ERROR_VARIABLE output)
  string(FIND "${output}" "${words}" place)
  if(NOT got EQUAL status OR place EQUAL -1)
    list(JOIN ARGN " " arguments)
    message(SEND_ERROR "repeat_measurement ${arguments}: status ${got}, expected ${status} and "
                       "'${words}' in:\n${output}")
  endif()
endfunction()

expect(0 "To repeat Thurber")
expect(0 "sharpens b4" Hahn1 --coefficient b4)
expect(0 "the published fit is exact" Wampler1)
expect(0 "usage: repeat_measurement" --help)
expect(2 "the sets are Misra1a, " Thurbur)
expect(2 "not among b1, b2, b3" Thurber --coefficient b8)
expect(2 "not understood: --verbose" --verbose)
expect(2 "not understood: --coefficient" Thurber --coefficient)

execute_process(COMMAND "${PROGRAM}" --list OUTPUT_VARIABLE sets OUTPUT_STRIP_TRAILING_WHITESPACE)
string(REPLACE ", " ";" sets "${sets}")
foreach(set IN LISTS sets)
  expect(0 "Where one more reading" ${set})
  expect(0 "To repeat ${set}" ${set} --numerical)
endforeach()
