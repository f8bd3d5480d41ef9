// The runner of every test executable; with Catch2 version 3 the library brings its own.
#if !__has_include(<catch2/catch_test_macros.hpp>)
#define CATCH_CONFIG_MAIN
#include <catch2/catch.hpp>
#endif
