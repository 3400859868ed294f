# Builds and passes the tests, from nothing.
#
#   cmake -P cmake/test.cmake [-DSTRICT=ON] [-DSANITIZE=ON] [-- ctest argument...]
#
# STRICT: warnings are errors. SANITIZE: address and undefined-behaviour sanitizers. Missing packages
# are installed first; see commands.cmake for the other options.

cmake_minimum_required(VERSION 3.23)
include("${CMAKE_CURRENT_LIST_DIR}/commands.cmake")

set(purpose test)
set(settings "")
if(STRICT)
  list(APPEND settings -C "${source}/cmake/dev.cmake")
  string(APPEND purpose -strict)
endif()
if(SANITIZE)
  list(APPEND settings -DWHET_SANITIZE=ON -DWHET_BENCHMARKS=OFF)
  string(APPEND purpose -sanitize)
endif()

whet_need(compiler builder eigen boost json doctest pkg_config)
whet_configure(${purpose} ${settings})
whet_build()
whet_say("testing")
whet_step(test "${CMAKE_CTEST_COMMAND}" --test-dir "${build}" --output-on-failure
          --no-tests=error --parallel ${jobs} ${arguments})
