# Install rules: headers, the CMake package, and whet.pc. Nothing in them depends on the machine or
# on where the prefix is, so the prefix may be moved.

include(GNUInstallDirs)
include(CMakePackageConfigHelpers)

set(package_dir ${CMAKE_INSTALL_DATADIR}/cmake/whet)
install(TARGETS whet EXPORT whet FILE_SET HEADERS)
install(TARGETS whet_json EXPORT whet_json FILE_SET HEADERS)
install(EXPORT whet NAMESPACE whet:: FILE whetTargets.cmake DESTINATION ${package_dir})
# A file of its own: it refers to nlohmann_json, which only its users need.
install(EXPORT whet_json NAMESPACE whet:: FILE whetJsonTargets.cmake DESTINATION ${package_dir})
write_basic_package_version_file(${PROJECT_BINARY_DIR}/whetConfigVersion.cmake
                                 COMPATIBILITY SameMinorVersion ARCH_INDEPENDENT)
install(FILES ${PROJECT_BINARY_DIR}/whetConfigVersion.cmake cmake/whetConfig.cmake
              cmake/dependencies.cmake
        DESTINATION ${package_dir})

set(pc_dir ${CMAKE_INSTALL_DATADIR}/pkgconfig)
file(RELATIVE_PATH pc_to_prefix /${pc_dir} /)
configure_file(cmake/whet.pc.in whet.pc @ONLY)
install(FILES ${PROJECT_BINARY_DIR}/whet.pc DESTINATION ${pc_dir})
