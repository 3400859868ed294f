# Installs whet from BUILD into a prefix, and moves that: nothing in it may know where it was.

file(REMOVE_RECURSE "${WORK}/first" "${WORK}/prefix")
execute_process(COMMAND "${CMAKE_COMMAND}" --install "${BUILD}" --prefix "${WORK}/first"
                COMMAND_ERROR_IS_FATAL ANY)
file(RENAME "${WORK}/first" "${WORK}/prefix")
