# What `cmake --install` lays down: the program, the library with its headers, and a package that
# find_package(stillmass) finds. tests/consumer builds a small program against it.
include(GNUInstallDirs)
include(CMakePackageConfigHelpers)

install(TARGETS stillmass_program RUNTIME DESTINATION "${CMAKE_INSTALL_BINDIR}")
install(TARGETS stillmass EXPORT stillmass ARCHIVE DESTINATION "${CMAKE_INSTALL_LIBDIR}")
install(DIRECTORY "${CMAKE_SOURCE_DIR}/include/stillmass" DESTINATION "${CMAKE_INSTALL_INCLUDEDIR}")
set(package "${CMAKE_INSTALL_LIBDIR}/cmake/stillmass")
install(EXPORT stillmass NAMESPACE stillmass:: FILE stillmassTargets.cmake DESTINATION "${package}")
file(CONFIGURE OUTPUT "${CMAKE_BINARY_DIR}/stillmassConfig.cmake" @ONLY CONTENT
"include(CMakeFindDependencyMacro)
find_dependency(PkgConfig)
find_dependency(Threads)
find_dependency(fmt)
pkg_check_modules(fftw3 REQUIRED IMPORTED_TARGET fftw3)
pkg_check_modules(sndfile REQUIRED IMPORTED_TARGET sndfile)
pkg_check_modules(nettle REQUIRED IMPORTED_TARGET nettle)
include(\"\${CMAKE_CURRENT_LIST_DIR}/stillmassTargets.cmake\")
")
write_basic_package_version_file("${CMAKE_BINARY_DIR}/stillmassConfigVersion.cmake" COMPATIBILITY SameMinorVersion)
install(FILES "${CMAKE_BINARY_DIR}/stillmassConfig.cmake" "${CMAKE_BINARY_DIR}/stillmassConfigVersion.cmake"
  DESTINATION "${package}")
