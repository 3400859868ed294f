# find_package(whet): the target whet::whet.
# find_package(whet COMPONENTS json): whet::json too, for whet/report/json.hpp.

include(${CMAKE_CURRENT_LIST_DIR}/dependencies.cmake)
if(whet_MISSING)
  set(whet_FOUND FALSE)
  set(whet_NOT_FOUND_MESSAGE "whet needs ${whet_MISSING}, which was not found.")
  return()
endif()
include(${CMAKE_CURRENT_LIST_DIR}/whetTargets.cmake)

foreach(component IN LISTS whet_FIND_COMPONENTS)
  set(whet_${component}_FOUND FALSE)
  if(component STREQUAL "json")
    find_package(nlohmann_json 3.9 QUIET)
    if(nlohmann_json_FOUND)
      include(${CMAKE_CURRENT_LIST_DIR}/whetJsonTargets.cmake)
      set(whet_json_FOUND TRUE)
    endif()
  endif()
  if(whet_FIND_REQUIRED_${component} AND NOT whet_${component}_FOUND)
    set(whet_FOUND FALSE)
    set(whet_NOT_FOUND_MESSAGE
        "whet has no component ${component} here (json is one; it needs nlohmann_json 3.9).")
  endif()
endforeach()
