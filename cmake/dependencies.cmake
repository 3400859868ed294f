# Finds what whet::whet links to, for the project itself and for its installed package.
# Sets whet_MISSING: empty where all is there, else the name of the first that is not.

set(whet_MISSING "")

# Eigen 5's package refuses a request for 3.4 and the reverse: look for one, then the other.
foreach(version 3.4 5)
  if(NOT TARGET Eigen3::Eigen)
    find_package(Eigen3 ${version} QUIET CONFIG)
  endif()
endforeach()
if(NOT TARGET Eigen3::Eigen)
  set(whet_MISSING "Eigen 3.4 or 5")
endif()

# Boost's own package, else CMake's module for a Boost that was installed without one.
foreach(mode CONFIG MODULE)
  if(NOT TARGET Boost::headers)
    find_package(Boost 1.74 QUIET ${mode})
  endif()
endforeach()
if(NOT whet_MISSING AND NOT TARGET Boost::headers)
  set(whet_MISSING "Boost 1.74 or later")
endif()

if(NOT TARGET Threads::Threads)
  find_package(Threads QUIET)
endif()
if(NOT whet_MISSING AND NOT TARGET Threads::Threads)
  set(whet_MISSING "a thread library")
endif()
