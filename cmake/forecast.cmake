# The main job, from nothing: builds and runs examples/repeat_measurement.cpp.
#
#   cmake -P cmake/forecast.cmake [-- argument...]
#
# Missing packages are installed first; see commands.cmake for the options.

cmake_minimum_required(VERSION 3.23)
include("${CMAKE_CURRENT_LIST_DIR}/commands.cmake")

whet_need(compiler builder eigen boost json)
whet_configure(forecast -DWHET_TESTS=OFF -DWHET_BENCHMARKS=OFF)
whet_build(repeat_measurement)
whet_step(run "${build}/examples/repeat_measurement" ${arguments})
