# Checks how cmake/forecast.cmake sees to its packages, in a copy of nothing but the scripts: with
# stand-ins for apt-get, id and sudo, a prefix of its own in which apt-get "installs", and a project
# that has nothing to compile. The folder has a blank in its name.

cmake_minimum_required(VERSION 3.23)

set(work "${WORK}/a folder")
file(REMOVE_RECURSE "${WORK}")
file(GLOB scripts "${CMAKE_CURRENT_LIST_DIR}/../../cmake/*.cmake")
file(COPY ${scripts} DESTINATION "${work}/tree/cmake")
# The stand-in for the project: its target writes the example.
file(WRITE "${work}/tree/CMakeLists.txt" [[
cmake_minimum_required(VERSION 3.23)
project(stand_in LANGUAGES NONE)
if(EXISTS "${PROJECT_SOURCE_DIR}/refuse_configure")
  message(FATAL_ERROR "refused")
endif()
file(WRITE "${PROJECT_BINARY_DIR}/examples/repeat_measurement.in" "#!/bin/sh\necho ran with \"$@\"\n")
add_custom_target(repeat_measurement
  COMMAND test ! -e ${PROJECT_SOURCE_DIR}/refuse_build
  COMMAND install -m 755 examples/repeat_measurement.in examples/repeat_measurement VERBATIM)
]])

function(program name text)
  file(WRITE "${work}/bin/${name}" "#!/bin/sh\n${text}\n")
  file(CHMOD "${work}/bin/${name}" PERMISSIONS OWNER_READ OWNER_WRITE OWNER_EXECUTE)
endfunction()

file(MAKE_DIRECTORY "${work}/bin")

# What the stand-ins need of the system; no compiler, no package manager.
foreach(name sh env mkdir touch test install cat chmod)
  find_program(path ${name} NO_CACHE REQUIRED)
  file(CREATE_LINK "${path}" "${work}/bin/${name}" SYMBOLIC)
  unset(path)
endforeach()
find_program(make NAMES make gmake ninja NO_CACHE REQUIRED)
cmake_path(GET make FILENAME make_name)
program(${make_name} "exec '${make}' \"$@\"")  # make calls itself by its name, which has no blank then
set(ENV{PATH} "${work}/bin")
unset(ENV{CXX})

program(id "echo 1000")
program(sudo "echo by sudo; exec \"$@\"")
set(apt_get [[echo "apt-get $*"
case " $* " in *" install "*) ;; *) exit 0;; esac
root='@work@/prefix/include'
mkdir -p "$root/eigen3/Eigen" "$root/boost/math/distributions" "$root/nlohmann"
touch "$root/eigen3/Eigen/Core" "$root/boost/math/distributions/chi_squared.hpp"
touch "$root/nlohmann/json.hpp" '@work@/bin/g++'; chmod 755 '@work@/bin/g++']])
string(CONFIGURE "${apt_get}" apt_get @ONLY)

# expect(<what> <status 0 or 1> <text in the output> [<text that is not>] OPTIONS <arguments>)
function(expect what status wanted unwanted)
  execute_process(COMMAND "${CMAKE_COMMAND}" "-DPREFIXES=${work}/prefix" -P
                          "${work}/${tree}/cmake/forecast.cmake" ${ARGN}
                  WORKING_DIRECTORY "${WORK}"
                  RESULT_VARIABLE got OUTPUT_VARIABLE output ERROR_VARIABLE output)
  string(FIND "${output}" "${wanted}" there)
  set(not_there -1)
  if(unwanted)
    string(FIND "${output}" "${unwanted}" not_there)
  endif()
  if(NOT got EQUAL status OR there EQUAL -1 OR NOT not_there EQUAL -1)
    message(SEND_ERROR "${what}: status ${got} (${status} wanted), with '${wanted}' and without "
                       "'${unwanted}' wanted in:\n${output}")
  endif()
endfunction()

set(tree tree)
set(packages "g++ libeigen3-dev libboost-dev nlohmann-json3-dev")
expect("No package manager: hints" 0 "vcpkg install eigen3" "apt-get")
file(REMOVE_RECURSE "${work}/tree/build")

program(dnf "exit 1")
expect("Another package manager: its line" 0
       "dnf install gcc-c++ eigen3-devel boost-devel json-devel" "apt-get")
file(REMOVE "${work}/bin/dnf")
file(REMOVE_RECURSE "${work}/tree/build")

program(apt-get "exit 9")
expect("An ordinary user is shown the line, and nothing is run" 1
       "    sudo apt-get update && sudo apt-get install -y --no-install-recommends ${packages}\n"
       "Running")
file(RENAME "${work}/bin/sudo" "${work}/sudo")
expect("A missing sudo is named" 1 "no sudo" "Running" -DINSTALL=ON)
file(RENAME "${work}/sudo" "${work}/bin/sudo")
expect("A failing installation is named" 1 "the step 'packages: apt-get install' failed (9)" "ran with"
       -DINSTALL=ON)
program(apt-get "exit 0")
expect("An installation without effect is noticed" 1 "still not found" "ran with" -DINSTALL=ON)

program(apt-get "${apt_get}")
program(id "echo 0")
expect("Root may ask for the line alone" 1 "    apt-get update && apt-get install" "Running"
       -DINSTALL=OFF)
program(id "echo 1000")
expect("With INSTALL=ON, sudo runs it, and the program gets its arguments" 0
       "by sudo\napt-get install -y --no-install-recommends ${packages}\n" "CMake Error"
       -DINSTALL=ON -- Misra1a "two words")
expect("Nothing missing: nothing installed; the arguments arrive" 0 "ran with one two words" "apt-get"
       -- one "two words")

file(REMOVE_RECURSE "${work}/prefix")
program(id "echo 0")
expect("Root installs at once, and says so before" 0
       "Running: apt-get update && apt-get install -y --no-install-recommends libeigen3-dev" "sudo")

file(TOUCH "${work}/tree/refuse_build")
expect("A failing build is named" 1 "the step 'build' failed" "ran with")
file(TOUCH "${work}/tree/refuse_configure")
expect("A failing configuration is named" 1 "the step 'configure' failed" "ran with")
file(REMOVE "${work}/tree/refuse_build" "${work}/tree/refuse_configure")

file(COPY "${work}/tree/" DESTINATION "${work}/copied tree")
set(tree "copied tree")
expect("A tree that was copied with its build folder is built anew" 0 "starting it anew" "Error")
expect("And stays built" 0 "ran with" "starting it anew")
