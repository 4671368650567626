# `cmake --install`: the program, the static library with its public headers, a CMake package and a pkg-config file.
include(GNUInstallDirs)
include(CMakePackageConfigHelpers)

set(package_folder ${CMAKE_INSTALL_LIBDIR}/cmake/stanchion)
set(generated ${CMAKE_CURRENT_BINARY_DIR}/install)

target_include_directories(stanchion INTERFACE $<INSTALL_INTERFACE:${CMAKE_INSTALL_INCLUDEDIR}>)
install(TARGETS stanchion EXPORT stanchion_targets ARCHIVE DESTINATION ${CMAKE_INSTALL_LIBDIR})
if(TARGET stanchion_program)
  install(TARGETS stanchion_program RUNTIME DESTINATION ${CMAKE_INSTALL_BINDIR})
  install(CODE "set(PROGRAM \"$<TARGET_FILE:stanchion_program>\")\nset(MAN \"${CMAKE_INSTALL_MANDIR}\")
set(SHARE \"${CMAKE_INSTALL_DATADIR}\")\ninclude(\"${CMAKE_CURRENT_SOURCE_DIR}/install_pages.cmake\")")
endif()
if(TARGET stanchion_recheck_mumps)
  install(TARGETS stanchion_recheck_mumps LIBRARY DESTINATION ${CMAKE_INSTALL_LIBDIR}/stanchion)
endif()
install(DIRECTORY ${PROJECT_SOURCE_DIR}/include/stanchion DESTINATION ${CMAKE_INSTALL_INCLUDEDIR})
install(DIRECTORY ${PROJECT_SOURCE_DIR}/data/schemas DESTINATION ${CMAKE_INSTALL_DATADIR}/stanchion)
install(FILES ${PROJECT_SOURCE_DIR}/data/openapi.json DESTINATION ${CMAKE_INSTALL_DATADIR}/stanchion)
install(DIRECTORY ${PROJECT_SOURCE_DIR}/data/page DESTINATION ${CMAKE_INSTALL_DATADIR}/stanchion OPTIONAL)
install(DIRECTORY ${PROJECT_SOURCE_DIR}/data/systemd DESTINATION ${CMAKE_INSTALL_DATADIR}/stanchion)
install(FILES ${PROJECT_SOURCE_DIR}/LICENSE DESTINATION ${CMAKE_INSTALL_DOCDIR})

install(EXPORT stanchion_targets NAMESPACE stanchion:: FILE stanchion_targets.cmake DESTINATION ${package_folder})
configure_package_config_file(${CMAKE_CURRENT_SOURCE_DIR}/stanchion-config.cmake.in
                              ${generated}/stanchion-config.cmake INSTALL_DESTINATION ${package_folder})
write_basic_package_version_file(${generated}/stanchion-config-version.cmake COMPATIBILITY SameMinorVersion)
install(FILES ${generated}/stanchion-config.cmake ${generated}/stanchion-config-version.cmake
        DESTINATION ${package_folder})

# A static library passes on what it links; pkg-config wants that as one line.
string(REPLACE ";" " " pkgconfig_libraries
       "${METIS_LIBRARY};${AMD_LIBRARY};${CAMD_LIBRARY};${LAPACK_LIBRARIES};${BLAS_LIBRARIES};${HDF5_LIBRARY}")
configure_file(${CMAKE_CURRENT_SOURCE_DIR}/stanchion.pc.in ${generated}/stanchion.pc @ONLY)
install(FILES ${generated}/stanchion.pc DESTINATION ${CMAKE_INSTALL_LIBDIR}/pkgconfig)
