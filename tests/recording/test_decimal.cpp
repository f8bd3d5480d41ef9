#include <bit>
#include <charconv>
#include <cmath>
#include <cstdint>
#include <random>
#include <string>

#include <fmt/format.h>

#include "recording/decimal.hpp"
#include "support/catch.hpp"

using stillmass::recording::read_decimal;

namespace {

// What std::from_chars makes of the text is the truth: its end and its bits; nothing where it finds no finite number.
void check_against_standard(const std::string& number) {
  const std::string text = number + "\n";
  const char* const begin = text.data();
  const char* const end = begin + text.size();
  double expected = 0.0;
  const auto [stop, fault] = std::from_chars(begin, end, expected);
  double value = 0.0;
  const char* const found = read_decimal(begin, end, value);
  CAPTURE(number);
  if (fault != std::errc{} || !std::isfinite(expected)) {
    CHECK(found == nullptr);
    return;
  }
  REQUIRE(found == stop);
  CHECK(std::bit_cast<std::uint64_t>(value) == std::bit_cast<std::uint64_t>(expected));
}

}  // namespace

TEST_CASE("a number of any form is read to the bit as the standard library reads it") {
  for (const char* text : {"0",
                           "-0",
                           "-0.0",
                           "5",
                           "5.",
                           ".5",
                           "-.5",
                           ".",
                           "-",
                           "",
                           "--1",
                           "-+1",
                           "1.5.3",
                           "1e5",
                           "1E-5",
                           "1e",
                           "1.e3",
                           "e5",
                           "inf",
                           "-inf",
                           "nan",
                           "0x10",
                           "1,5",
                           "1 5",
                           "1;5",
                           "123456789012345",
                           "1234567890123456",
                           "0.000000000000001",
                           "0.0000000000000001",
                           "999999999999999.9",
                           "99999999999999999999999",
                           "000000000000000000001.5",
                           "0.1",
                           "0.3",
                           "9007199254740993",
                           "4503599627370497.5",
                           "1e308",
                           "1e309",
                           "-1e309",
                           "4.9e-324",
                           "1e-400",
                           "2.2250738585072011e-308"}) {
    check_against_standard(text);
  }
}

TEST_CASE("numbers as recorders print them are read to the bit as the standard library reads them") {
  std::mt19937_64 random(20);  // seed fixed: the same numbers in every run
  std::uniform_real_distribution<double> exponent(-8.0, 8.0);
  std::normal_distribution<double> normal;
  for (int i = 0; i < 20000; ++i) {
    const double value = normal(random) * std::pow(10.0, exponent(random));
    check_against_standard(fmt::format("{:.{}f}", value, i % 18));
    check_against_standard(fmt::format("{:.{}g}", value, 1 + i % 17));
    check_against_standard(fmt::format("{:.{}e}", value, i % 17));
    check_against_standard(fmt::format("{}", static_cast<std::int64_t>(random() >> (i % 64))));
  }
}
