# Settings for developers: cmake -C cmake/dev.cmake -S . -B build
# Every warning is an error (CMake 3.24 or later). Sanitizers stay off: -DWHET_SANITIZE=ON.

set(CMAKE_COMPILE_WARNING_AS_ERROR ON CACHE BOOL "Warnings are errors")
set(CMAKE_EXPORT_COMPILE_COMMANDS ON CACHE BOOL "For clang-tidy and editors")
set(WHET_SANITIZE OFF CACHE BOOL "Address and undefined-behaviour sanitizers in tests and examples")
