# Builds the benchmarks for this machine (-O3 -march=native), runs them, and prints one row a
# measurement: what, ours, the peer's in the same run, the ratio, the bar, met or not.
#
#   cmake -P cmake/measure.cmake [-DONLY=name | -- name...]
#
# A name selects the benchmarks that hold it. Peers that are not installed are named, their rows
# skipped. The status is 1 where a bar is not met.

cmake_minimum_required(VERSION 3.23)
include("${CMAKE_CURRENT_LIST_DIR}/commands.cmake")
list(APPEND arguments ${ONLY})

file(GLOB all RELATIVE "${source}/benchmarks" "${source}/benchmarks/*.cpp")
set(names "")
foreach(file IN LISTS all)
  string(REPLACE ".cpp" "" name ${file})
  set(selected TRUE)
  if(arguments)
    set(selected FALSE)
    foreach(wanted IN LISTS arguments)
      string(FIND ${name} "${wanted}" place)
      if(NOT place EQUAL -1)
        set(selected TRUE)
      endif()
    endforeach()
  endif()
  if(selected)
    list(APPEND names ${name})
  endif()
endforeach()
if(NOT names)
  list(JOIN all " " known)
  message(FATAL_ERROR "whet: the step 'select' failed: no benchmark by that name among: ${known}")
endif()

whet_need(compiler builder eigen boost json)
whet_configure(measure -DWHET_TESTS=OFF -DWHET_EXAMPLES=OFF -DWHET_BENCHMARKS=ON -DWHET_OPTIMISE=ON)
list(TRANSFORM names PREPEND whet_bench_ OUTPUT_VARIABLE targets)
whet_build(${targets})

# The columns of benchmarks/row.hpp.
string(REPEAT " " 54 gap)
whet_step(head "${CMAKE_COMMAND}" -E echo
          "what${gap}         ours         peer    ratio      bar  verdict")
set(rows "")
foreach(target IN LISTS targets)
  execute_process(COMMAND "${build}/benchmarks/${target}" RESULT_VARIABLE status
                  OUTPUT_VARIABLE output ECHO_OUTPUT_VARIABLE)
  if(NOT status EQUAL 0)
    message(FATAL_ERROR "whet: the step 'run ${target}' failed (${status}).")
  endif()
  string(APPEND rows "${output}")
endforeach()

string(REGEX MATCHALL "  met\n" met "${rows}")
string(REGEX MATCHALL "  NOT MET\n" not_met "${rows}")
string(REGEX MATCHALL "  skipped: " skipped "${rows}")
foreach(verdict met not_met skipped)
  list(LENGTH ${verdict} ${verdict})
endforeach()
whet_say("${met} met, ${not_met} not met, ${skipped} skipped")
if(not_met GREATER 0)
  message(FATAL_ERROR "whet: the step 'compare' failed: ${not_met} of the bars are not met.")
endif()
