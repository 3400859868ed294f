# What the commands cmake/forecast.cmake, test.cmake and measure.cmake share: packages, configuring,
# building, running. Every step says its name where it fails, and ends the command with status 1.
#
# Options, before -P or behind the script: -DCXX=clang++ (or CXX in the environment),
# -DINSTALL=ON (install missing packages through sudo; OFF: show the line only), -DBUILD=<folder>.
# What stands behind "--" goes to the program that the command runs: ${arguments}.

cmake_path(SET source NORMALIZE "${CMAKE_CURRENT_LIST_DIR}/..")
string(REGEX REPLACE "/$" "" source "${source}")

# CMake reads -D options before -P alone, and leaves what follows the script to it.
set(arguments "")
set(behind_script FALSE)
set(behind_dashes FALSE)
math(EXPR last "${CMAKE_ARGC} - 1")
foreach(i RANGE ${last})
  set(argument "${CMAKE_ARGV${i}}")
  if(behind_dashes)
    list(APPEND arguments "${argument}")
  elseif(argument STREQUAL "--")
    set(behind_dashes TRUE)
  elseif(behind_script AND argument MATCHES "^-D([A-Za-z_]+)(:[A-Z]+)?=(.*)$")
    set(${CMAKE_MATCH_1} "${CMAKE_MATCH_3}")
  elseif(argument STREQUAL "-P")
    set(behind_script TRUE)
  endif()
endforeach()

if(CXX)
  set(ENV{CXX} "${CXX}")
endif()
if(NOT BUILD)
  set(BUILD "${source}/build")
endif()
cmake_path(ABSOLUTE_PATH BUILD NORMALIZE)

function(whet_say text)
  message(STATUS "whet: ${text}")
endfunction()

# Run a step: its failure ends the command.
function(whet_step name)
  execute_process(COMMAND ${ARGN} RESULT_VARIABLE status)
  if(NOT status EQUAL 0)
    message(FATAL_ERROR "whet: the step '${name}' failed (${status}).")
  endif()
endfunction()

# ---- Packages -----------------------------------------------------------------------------------

# What can be needed: the programs or the header that show that it is there, and its name with each
# package manager.
set(compiler_programs c++ g++ clang++)
set(compiler_packages apt-get g++ dnf gcc-c++ zypper gcc-c++ pacman gcc apk g++ brew gcc)
set(builder_programs ninja make gmake)
set(builder_packages apt-get make dnf make zypper make pacman make apk make brew make)
set(eigen_headers eigen3/Eigen/Core Eigen/Core)
set(eigen_packages apt-get libeigen3-dev dnf eigen3-devel zypper eigen3-devel pacman eigen apk
                   eigen-dev brew eigen)
set(boost_headers boost/math/distributions/chi_squared.hpp)
set(boost_packages apt-get libboost-dev dnf boost-devel zypper boost-devel pacman boost apk
                   boost-dev brew boost)
set(json_headers nlohmann/json.hpp)
set(json_packages apt-get nlohmann-json3-dev dnf json-devel zypper nlohmann_json-devel pacman
                  nlohmann-json apk nlohmann-json brew nlohmann-json)
set(doctest_headers doctest/doctest.h)
set(doctest_packages apt-get doctest-dev dnf doctest-devel zypper doctest-devel pacman doctest apk
                     doctest-dev brew doctest)
set(pkg_config_programs pkg-config pkgconf)
set(pkg_config_packages apt-get pkg-config dnf pkgconf-pkg-config zypper pkgconf-pkg-config pacman
                        pkgconf apk pkgconf brew pkgconf)
set(dnf_install "dnf install")
set(zypper_install "zypper install")
set(pacman_install "pacman -S")
set(apk_install "apk add")
set(brew_install "brew install")

# A compiler that was asked for: found as CMake finds it, or known by its usual name.
if(DEFINED ENV{CXX})
  get_filename_component(compiler_programs "$ENV{CXX}" PROGRAM)
  if("$ENV{CXX}" MATCHES "^(g|clang)\\+\\+(-[0-9]+)?$")
    if(NOT compiler_programs)
      set(compiler_programs "$ENV{CXX}")
    endif()
    string(REPLACE clang++ clang package "$ENV{CXX}")
    list(PREPEND compiler_packages apt-get ${package})
  elseif(NOT compiler_programs)
    message(FATAL_ERROR "whet: the step 'packages' failed: CXX=$ENV{CXX} is no program.")
  endif()
endif()

# Where headers are looked for.
if(NOT PREFIXES)
  file(TO_CMAKE_PATH "$ENV{CMAKE_PREFIX_PATH}" PREFIXES)
  list(APPEND PREFIXES "$ENV{CONDA_PREFIX}" "$ENV{VCPKG_INSTALLATION_ROOT}" /usr /usr/local
       /opt/homebrew /opt/local)
  list(REMOVE_ITEM PREFIXES "")
endif()

# Sets `missing` to those of the things that are not there.
function(whet_probe)
  set(missing "")
  foreach(thing IN LISTS ARGN)
    unset(found CACHE)
    if(${thing}_programs)
      find_program(found NAMES ${${thing}_programs} NAMES_PER_DIR)
    else()
      find_path(found NAMES ${${thing}_headers} PATHS ${PREFIXES} PATH_SUFFIXES include
                NO_DEFAULT_PATH)
    endif()
    if(NOT found)
      list(APPEND missing ${thing})
    endif()
    unset(found CACHE)
  endforeach()
  set(missing "${missing}" PARENT_SCOPE)
endfunction()

# Sees to it that the things are installed; does nothing, and says nothing, where they are.
function(whet_need)
  whet_probe(${ARGN})
  if(NOT missing)
    return()
  endif()
  list(JOIN missing ", " names)

  set(manager "")
  foreach(candidate apt-get dnf zypper pacman apk brew)
    find_program(path ${candidate} NO_CACHE)
    if(path)
      set(manager ${candidate})
      break()
    endif()
  endforeach()
  if(NOT manager)
    whet_say("not found: ${names}. To install, for instance:
   conda install -c conda-forge eigen libboost-headers nlohmann_json doctest
   vcpkg install eigen3 boost-math nlohmann-json doctest
   Going on without.")
    return()
  endif()
  set(packages "")
  foreach(thing IN LISTS missing)
    list(FIND ${thing}_packages ${manager} place)
    math(EXPR place "${place} + 1")
    list(GET ${thing}_packages ${place} package)
    list(APPEND packages ${package})
  endforeach()
  list(JOIN packages " " package_names)
  if(NOT manager STREQUAL "apt-get")
    # Other systems keep headers in places that are not known here: CMake has the last word.
    whet_say("not found: ${names}. To install: ${${manager}_install} ${package_names}\n   Going on without.")
    return()
  endif()

  execute_process(COMMAND id -u OUTPUT_VARIABLE user OUTPUT_STRIP_TRAILING_WHITESPACE)
  set(sudo "")
  if(NOT user EQUAL 0)
    set(sudo sudo)
  endif()
  set(install install -y --no-install-recommends ${packages})
  list(JOIN install " " line)
  string(STRIP "${sudo} apt-get" apt)
  set(line "${apt} update && ${apt} ${line}")
  find_program(sudo_path sudo NO_CACHE)
  if(sudo AND INSTALL AND NOT sudo_path)
    message(FATAL_ERROR "whet: the step 'packages' cannot go on: not found: ${names}, and no sudo to "
                        "install them. Run the command again as root.")
  elseif(NOT INSTALL AND (sudo OR DEFINED INSTALL))
    message(FATAL_ERROR "whet: the step 'packages' cannot go on: not found: ${names}. Run this, or "
                        "the command again with -DINSTALL=ON:\n  ${line}\n")
  endif()

  whet_say("not found: ${names}. Running: ${line}")
  execute_process(COMMAND ${sudo} apt-get update RESULT_VARIABLE status)
  if(NOT status EQUAL 0)
    whet_say("apt-get update failed (${status}); trying with the lists that are there.")
  endif()
  whet_step("packages: apt-get install" ${sudo} env DEBIAN_FRONTEND=noninteractive
            apt-get ${install})
  whet_probe(${missing})
  if(missing)
    list(JOIN missing ", " names)
    message(FATAL_ERROR "whet: the step 'packages' failed: installed, but still not found: ${names}.")
  endif()
endfunction()

# ---- Configuring and building -------------------------------------------------------------------

# Configure in a folder of its own for this purpose and compiler; sets `build` to it.
function(whet_configure purpose)
  string(REGEX REPLACE "[^A-Za-z0-9+.-]+" "_" suffix "$ENV{CXX}")
  set(build "${BUILD}/${purpose}")
  if(suffix)
    string(APPEND build "-${suffix}")
  endif()
  set(build "${build}" PARENT_SCOPE)

  set(generator "")
  if(EXISTS "${build}/CMakeCache.txt")
    # A tree that was copied or moved with its build folder.
    load_cache("${build}" READ_WITH_PREFIX was_ CMAKE_HOME_DIRECTORY CMAKE_CACHEFILE_DIR)
    file(REAL_PATH "${was_CMAKE_HOME_DIRECTORY}" old_source)
    file(REAL_PATH "${was_CMAKE_CACHEFILE_DIR}" old_build)
    file(REAL_PATH "${source}" new_source)
    file(REAL_PATH "${build}" new_build)
    if(NOT "${old_source};${old_build}" STREQUAL "${new_source};${new_build}")
      whet_say("${build} was configured for another folder: starting it anew.")
      file(REMOVE_RECURSE "${build}")
    endif()
  endif()
  if(NOT EXISTS "${build}/CMakeCache.txt")
    find_program(ninja ninja NO_CACHE)
    if(ninja)
      set(generator -G Ninja)
    endif()
  endif()

  whet_say("configuring in ${build}")
  execute_process(COMMAND "${CMAKE_COMMAND}" ${ARGN} -S "${source}" -B "${build}" ${generator}
                  RESULT_VARIABLE status OUTPUT_VARIABLE output ERROR_VARIABLE output)
  if(NOT status EQUAL 0)
    message(NOTICE "${output}")
    message(FATAL_ERROR "whet: the step 'configure' failed (${status}).")
  endif()
endfunction()

# How many jobs at a time: as many as there are cores for this process.
if(DEFINED ENV{CMAKE_BUILD_PARALLEL_LEVEL})
  set(jobs $ENV{CMAKE_BUILD_PARALLEL_LEVEL})
else()
  cmake_host_system_information(RESULT jobs QUERY NUMBER_OF_LOGICAL_CORES)
  find_program(nproc nproc NO_CACHE)
  if(nproc)
    execute_process(COMMAND "${nproc}" OUTPUT_VARIABLE jobs OUTPUT_STRIP_TRAILING_WHITESPACE)
  endif()
endif()

# Build targets, or everything where none is named, in the folder of the last whet_configure.
function(whet_build)
  set(targets "")
  if(ARGN)
    set(targets --target ${ARGN})
  endif()
  whet_say("building")
  whet_step(build "${CMAKE_COMMAND}" --build "${build}" --parallel ${jobs} ${targets})
endfunction()
