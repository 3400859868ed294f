# Plants breaches of the layers in small trees, and checks that cmake/layers.cmake names each.

cmake_minimum_required(VERSION 3.23)

# expect(<name> <text of the refusal, or empty for none> <header> <its text> ...)
function(expect name refusal)
  file(REMOVE_RECURSE "${WORK}/${name}")
  while(ARGN)
    list(POP_FRONT ARGN header text)
    file(WRITE "${WORK}/${name}/whet/${header}" "#pragma once\n${text}\n")
  endwhile()
  execute_process(
    COMMAND "${CMAKE_COMMAND}" "-DROOT=${WORK}/${name}"
            -P "${CMAKE_CURRENT_FUNCTION_LIST_DIR}/../../cmake/layers.cmake"
    RESULT_VARIABLE status OUTPUT_VARIABLE output ERROR_VARIABLE output)
  string(REGEX REPLACE "[ \n]+" " " output "${output}")  # message() wraps lines
  string(FIND "${output}" "${refusal}" place)
  if(refusal AND (status EQUAL 0 OR place EQUAL -1))
    message(SEND_ERROR "${name}: not refused with '${refusal}', but: ${output}")
  elseif(NOT refusal AND NOT status EQUAL 0)
    message(SEND_ERROR "${name}: refused: ${output}")
  endif()
endfunction()

expect(clean ""
       whet.hpp "#include <whet/report/table.hpp>"
       report/table.hpp "#include <vector>\n#include <whet/support/error.hpp>"
       report/json.hpp "#include <nlohmann/json.hpp>"
       support/error.hpp "")
expect(to_the_right "parameters/point.hpp: includes <whet/forecasts/forecast.hpp>, which is not to the left"
       parameters/point.hpp "  # include <whet/forecasts/forecast.hpp>"
       forecasts/forecast.hpp "")
expect(unknown_folder "the folder extras is in no layer" extras/more.hpp "")
expect(quotes "support/text.hpp: an include in quotes" support/text.hpp "#include \"../report/table.hpp\"")
expect(umbrella_inside "report/table.hpp: includes <whet/whet.hpp>, which is for users"
       report/table.hpp "#include <whet/whet.hpp>")
expect(umbrella_json "whet.hpp: pulls in <nlohmann/json.hpp> by whet/report/json.hpp"
       whet.hpp "#include <whet/report/table.hpp>"
       report/table.hpp "#include <whet/report/json.hpp>"
       report/json.hpp "#include <nlohmann/json.hpp>")
expect(umbrella_mpi "whet.hpp: pulls in <mpi.h> by whet/evaluation/mpi.hpp"
       whet.hpp "#include <whet/evaluation/mpi.hpp>"
       evaluation/mpi.hpp "#include <mpi.h>")
expect(umbrella_surveys "whet.hpp: pulls in <whet/surveys/photometric.hpp>"
       whet.hpp "#include <whet/surveys/photometric.hpp>"
       surveys/photometric.hpp "")
expect(empty "no headers under")
