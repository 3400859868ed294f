# What tests, examples and benchmarks share. Nothing here reaches whet::whet or its users.

option(WHET_SANITIZE "Address and undefined-behaviour sanitizers in tests and examples" OFF)

add_library(whet_warnings INTERFACE)
if(NOT MSVC)
  target_compile_options(whet_warnings INTERFACE -Wall -Wextra -Wpedantic -Wconversion
                         -Wsign-conversion -Wshadow -Wold-style-cast)
endif()

# Tests and examples: quick to compile, with every assertion, whatever the build type.
add_library(whet_program INTERFACE)
target_link_libraries(whet_program INTERFACE whet whet_warnings)
target_include_directories(whet_program INTERFACE "${PROJECT_SOURCE_DIR}/examples")  # <nist/...>
target_compile_definitions(whet_program INTERFACE "WHET_DATA_DIR=\"${PROJECT_SOURCE_DIR}/tests/data\"")
if(NOT MSVC)
  target_compile_options(whet_program INTERFACE -O1 -UNDEBUG)
endif()
if(WHET_SANITIZE)
  set(sanitizers -fsanitize=address,undefined -fno-sanitize-recover=all)
  target_compile_options(whet_program INTERFACE ${sanitizers} -fno-omit-frame-pointer)
  target_link_options(whet_program INTERFACE ${sanitizers})
endif()
if(nlohmann_json_FOUND)
  target_link_libraries(whet_program INTERFACE whet_json)
endif()

# Takes the sources that read JSON out of a list, and says so, where nlohmann_json is not there.
function(whet_drop_json list)
  set(kept "")
  foreach(source IN LISTS ${list})
    file(STRINGS "${source}" needs REGEX "#include <(nlohmann/|nist/|whet/report/json)")
    if(needs AND NOT nlohmann_json_FOUND)
      message(STATUS "whet: left out, for want of nlohmann_json: ${source}")
    else()
      list(APPEND kept "${source}")
    endif()
  endforeach()
  set(${list} "${kept}" PARENT_SCOPE)
endfunction()
