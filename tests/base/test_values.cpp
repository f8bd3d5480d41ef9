// Units, estimates, numbers, texts, hashes: the small values that every floor speaks.
#include <cmath>
#include <limits>
#include <set>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/digest.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/base/unit.hpp"

#include "support/catch.hpp"

using namespace stillmass::base;

TEST_CASE("units have their exact factors") {
  // Exact by definition: standard gravity (CGPM 1901), international inch and pound.
  CHECK(unit_named("g")->to_si == 9.80665);
  CHECK(unit_named("mil")->to_si == Approx(2.54e-5).epsilon(1e-15));
  CHECK(unit_named("lbf")->to_si == Approx(0.45359237 * 9.80665).epsilon(1e-15));
  // CHECKS S9: 1 in/s peak is 17.961 mm/s r.m.s.
  CHECK(unit_named("in/s")->to_si / from_rms(Detector::peak) == Approx(17.961e-3).epsilon(1e-4));
  CHECK(unit_named("rpm")->to_si * 1500 == Approx(25.0));
}

TEST_CASE("units are known in the spellings of loggers, and case is kept where it matters") {
  CHECK(unit_named("m/s^2")->name == "m/s2");
  CHECK(unit_named("m/s\xC2\xB2")->name == "m/s2");
  CHECK(unit_named(" \xC2\xB5m ")->name == "um");
  CHECK(unit_named("Volts")->name == "V");
  CHECK(unit_named("Pounds")->name == "lbf");
  CHECK(unit_named("G")->name == "g");
  CHECK(unit_named("MM/S")->name == "mm/s");
  CHECK_FALSE(unit_named("Mm"));
  CHECK_FALSE(unit_named("mHz"));
  CHECK_FALSE(unit_named("mN"));
  CHECK_FALSE(unit_named(""));
  CHECK_FALSE(unit_named("furlong"));
}

TEST_CASE("Student's t follows the table") {
  // t at 97.5 % (Abramowitz & Stegun, table 26.10).
  const std::pair<double, double> table[] = {{1, 12.706}, {2, 4.303},  {3, 3.182},  {4, 2.776},
                                             {5, 2.571},  {6, 2.447},  {7, 2.365},  {8, 2.306},
                                             {10, 2.228}, {15, 2.131}, {30, 2.042}, {120, 1.980}};
  for (const auto& [dof, t] : table) CHECK(student975(dof) == Approx(t).epsilon(1e-3));
  CHECK(student975({}) == Approx(1.95996).epsilon(1e-5));
}

TEST_CASE("an estimate without uncertainty has no interval") {
  const Estimate bare{24.6, {}, {}, Quantity::frequency};
  CHECK_FALSE(bare.interval95());
  CHECK_FALSE(bare.relative());
  const Estimate full{10.0, 0.1, 2.0, Quantity::frequency};
  CHECK(full.interval95()->hi == Approx(10.4303).epsilon(1e-4));
  CHECK(full.relative() == 0.01);
}

TEST_CASE("numbers are read whole or not at all, whatever the locale") {
  CHECK(parse_number(" -1.5e3 ") == -1500.0);
  CHECK(parse_number("+2") == 2.0);
  for (const char* wrong : {"", "1,5", "1.5x", "nan", "inf", "+-1", "0x10", "1e999"}) CHECK_FALSE(parse_number(wrong));
  CHECK(parse_integer("42") == 42);
  CHECK_FALSE(parse_integer("42.0"));
}

TEST_CASE("numbers are written so that they read back") {
  for (const double value : {0.1, 1.0 / 3.0, 1e-300, -24.6, 123456789.123456789}) {
    CHECK(parse_number(shortest(value)) == value);
  }
  CHECK(shortest(std::numeric_limits<double>::quiet_NaN()) == "null");
  CHECK(rounded(24.6337) == "24.6");
  CHECK(rounded(1478.3, 4) == "1478");
  CHECK(rounded(147834, 3) == "148000");
  CHECK(rounded(0.00912, 2) == "0.0091");
  CHECK(rounded(0.0) == "0");
  CHECK(rounded(9.996, 3) == "10.00");
  CHECK(plain(2048.0) == "2048");
  CHECK(plain(0.50) == "0.5");
  CHECK(plain(100.0, 2) == "100");
}

TEST_CASE("texts of any origin become printable UTF-8") {
  CHECK(is_utf8("caf\xC3\xA9"));
  CHECK_FALSE(is_utf8("caf\xE9"));
  CHECK_FALSE(is_utf8("\xC0\x80"));
  CHECK_FALSE(is_utf8("\xED\xA0\x80"));
  CHECK(latin1_to_utf8("\xB5m") == "\xC2\xB5m");
  CHECK(utf16_to_utf8(std::string_view("\xFF\xFE\x41\x00\x3D\xD8\x00\xDE", 8), false) == "A\xF0\x9F\x98\x80");
  CHECK(printable("a\nb\xE9") == "a?b\xC3\xA9");
  CHECK(printable("a\xC2\x9B"
                  "31mb") == "a?31mb");  // U+009B begins a terminal's control sequence
  CHECK(safe_file_name("../etc/x y") == "-..-etc-x-y");
  CHECK(safe_file_name("") == "-");
}

TEST_CASE("the nearest name is offered only for a slip") {
  const std::string_view names[] = {"speed_rpm", "power_kw", "vanes"};
  CHECK(nearest_name("sped_rpm", names) == "speed_rpm");
  CHECK(nearest_name("vane", names) == "vanes");
  CHECK(nearest_name("colour", names).empty());
}

TEST_CASE("SHA-256 gives the digests of the standard") {
  // FIPS 180-2, appendix B.1.
  CHECK(sha256("abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
}

TEST_CASE("every code has its name once and its words") {
  std::set<std::string_view> names;
  for (const CodeText& code : all_codes()) {
    CHECK(&text(code.code) == &code);
    CHECK(names.insert(code.name).second);
    CHECK(code.name.find_first_not_of("abcdefghijklmnopqrstuvwxyz-") == std::string_view::npos);
    CHECK_FALSE(code.seen.empty());
    CHECK_FALSE(code.likely_cause.empty());
    CHECK_FALSE(code.next_step.empty());
  }
}

TEST_CASE("an answer is a value or a refusal") {
  const Answer<int> yes = 3;
  const Answer<int> no = Refusal{"no-hits", "no blow was found", "strike the machine"};
  CHECK(yes);
  CHECK(*yes == 3);
  CHECK_FALSE(no);
  CHECK(no.refusal().code == "no-hits");
  CHECK_THROWS(no.value());
}
