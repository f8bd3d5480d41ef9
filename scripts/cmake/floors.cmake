# The house: one object library a floor, each linked to the floors above it and to nothing below, so that the linker
# refuses what tests/layout/floors.py would report. All of them make the library `stillmass`; `cli` makes the program.
#
#   stillmass_floor(NAME USES floor... PRIVATE third-party-target...)

function(stillmass_floor name)
  cmake_parse_arguments(floor "" "" "USES;PRIVATE" ${ARGN})
  file(GLOB sources CONFIGURE_DEPENDS
    "${CMAKE_SOURCE_DIR}/src/${name}/*.cpp" "${CMAKE_SOURCE_DIR}/src/${name}/*.hpp"
    "${CMAKE_SOURCE_DIR}/include/stillmass/${name}/*.hpp")
  if(NOT sources MATCHES "\\.cpp")
    file(WRITE "${CMAKE_BINARY_DIR}/embedded/empty_${name}.cpp" "")
    list(APPEND sources "${CMAKE_BINARY_DIR}/embedded/empty_${name}.cpp")
  endif()
  add_library(stillmass_${name} OBJECT ${sources})
  target_include_directories(stillmass_${name}
    PUBLIC "$<BUILD_INTERFACE:${CMAKE_SOURCE_DIR}/include>" PRIVATE "${CMAKE_SOURCE_DIR}/src")
  target_link_libraries(stillmass_${name} PRIVATE stillmass_warnings ${floor_PRIVATE})
  set_property(GLOBAL APPEND PROPERTY STILLMASS_FLOORS ${name})
endfunction()

stillmass_floor(base PRIVATE fmt::fmt PkgConfig::nettle Threads::Threads)
stillmass_floor(numeric PRIVATE fmt::fmt Eigen3::Eigen Boost::headers Threads::Threads)
stillmass_floor(recording PRIVATE fmt::fmt PkgConfig::sndfile Threads::Threads)
stillmass_floor(spectral PRIVATE fmt::fmt PkgConfig::fftw3 Threads::Threads)
stillmass_floor(rotation PRIVATE fmt::fmt)
stillmass_floor(modal PRIVATE fmt::fmt)
stillmass_floor(machine PRIVATE fmt::fmt)
stillmass_floor(absorber PRIVATE fmt::fmt)
stillmass_floor(step PRIVATE fmt::fmt)
stillmass_floor(survey PRIVATE fmt::fmt)
stillmass_floor(report PRIVATE fmt::fmt nlohmann_json::nlohmann_json)
stillmass_floor(simulate PRIVATE fmt::fmt)

target_compile_definitions(stillmass_base PRIVATE STILLMASS_VERSION="${PROJECT_VERSION}")
file(GLOB tables CONFIGURE_DEPENDS "${CMAKE_SOURCE_DIR}/data/tables/*.toml")
stillmass_embed(stillmass_base stillmass::base::table_text ${tables})
file(GLOB page CONFIGURE_DEPENDS "${CMAKE_SOURCE_DIR}/src/report/page/*.css" "${CMAKE_SOURCE_DIR}/src/report/page/*.js")
stillmass_embed(stillmass_report stillmass::report::asset
  ${page} "${CMAKE_SOURCE_DIR}/data/schema/result-1.schema.json" "${STILLMASS_CHART_BUNDLE}")

get_property(floors GLOBAL PROPERTY STILLMASS_FLOORS)
add_library(stillmass STATIC)
add_library(stillmass::stillmass ALIAS stillmass)
foreach(floor IN LISTS floors)
  target_sources(stillmass PRIVATE $<TARGET_OBJECTS:stillmass_${floor}>)
endforeach()
target_include_directories(stillmass PUBLIC
  "$<BUILD_INTERFACE:${CMAKE_SOURCE_DIR}/include>" "$<INSTALL_INTERFACE:include>")
target_link_libraries(stillmass PRIVATE
  fmt::fmt PkgConfig::nettle PkgConfig::sndfile PkgConfig::fftw3 Threads::Threads)

file(GLOB cli CONFIGURE_DEPENDS "${CMAKE_SOURCE_DIR}/src/cli/*.cpp" "${CMAKE_SOURCE_DIR}/src/cli/*.hpp")
add_executable(stillmass_program ${cli})
set_target_properties(stillmass_program PROPERTIES OUTPUT_NAME stillmass)
target_include_directories(stillmass_program PRIVATE "${CMAKE_SOURCE_DIR}/src")
target_link_libraries(stillmass_program PRIVATE stillmass stillmass_warnings fmt::fmt CLI11::CLI11)
