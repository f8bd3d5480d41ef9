#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/base/settings.hpp"
#include "stillmass/base/text.hpp"

#include "support/catch.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass::base;
using stillmass::tests::TemporaryFolder;

namespace {

const std::vector<Key> keys = {
    {"machine", KeyType::table, "", true, "", "the machine"},
    {"machine.name", KeyType::text, "", true, "", "its name"},
    {"machine.kind", KeyType::text, "", false, "general", "", "pump|fan|general"},
    {"machine.power_kw", KeyType::number, "kW", false, "", "", "", {0.001, 1e6}},
    {"machine.speed_rpm", KeyType::number_or_pair, "rpm", false, "", ""},
    {"point", KeyType::tables, "", false, "", "a point"},
    {"point.name", KeyType::text, "", true, "", "its name"},
    {"point.position_m", KeyType::numbers, "m", false, "", ""},
};

std::string fault_of(const std::string& text) {
  try {
    Settings::parse(text, "s.toml", keys);
  } catch (const Error& error) {
    CHECK(error.kind == ErrorKind::usage);
    return error.what();
  }
  return "";
}

}  // namespace

TEST_CASE("a strict settings file gives its values") {
  const Settings settings = Settings::parse(
      "[machine]\nname = \"Pumpe \xC3\xBC\" # \xC3\xA4\npower_kw = 30\nspeed_rpm = [900, 1478.5]\n"
      "[[point]]\nname = 'a'\nposition_m = [1, 2.5, -3]\n[[point]]\nname = 'b'\n",
      "s.toml", keys);
  const auto machine = settings.root().table("machine");
  REQUIRE(machine);
  CHECK(machine->text("name") == "Pumpe \xC3\xBC");
  CHECK(machine->number("power_kw") == 30.0);
  CHECK(machine->interval("speed_rpm") == Interval{900, 1478.5});
  CHECK_FALSE(machine->text("kind"));
  const auto points = settings.root().tables("point");
  REQUIRE(points.size() == 2);
  CHECK(points[0].numbers("position_m") == std::vector<double>{1, 2.5, -3});
  CHECK(points[1].line() == 8);
}

TEST_CASE("every slip in a settings file is one line with the line number and the nearest name") {
  CHECK(fault_of("[machine]\nname = 'x'\npower_kW = 3\n") ==
        "s.toml:3: unknown key 'machine.power_kW'; did you mean 'power_kw'?");
  CHECK(fault_of("[machine]\nname = 3\n") == "s.toml:2: 'machine.name' must be a text in quotes");
  CHECK(fault_of("[machine]\nname = 'x'\nkind = 'boat'\n") ==
        "s.toml:3: 'machine.kind' must be one of \"pump\", \"fan\", \"general\"");
  CHECK(fault_of("[machine]\nname = 'x'\npower_kw = nan\n") == "s.toml:3: 'machine.power_kw' must be a finite number");
  CHECK(fault_of("[machine]\nname = 'x'\npower_kw = -1\n").find("outside 0.001 to 1e+06 kW") != std::string::npos);
  CHECK(fault_of("[machine]\nname = 'x'\nspeed_rpm = [2, 1]\n").find("first number") != std::string::npos);
  CHECK(fault_of("[machine]\nkind = 'fan'\n") == "s.toml:1: 'machine.name' is missing; its name");
  CHECK(fault_of("[[point]]\nname = 'a'\n").find("'machine' is missing") != std::string::npos);
  CHECK(fault_of("[machine]\nname = 'x'\n[machine]\n").find("s.toml:3") == 0);
  CHECK(fault_of("[machine\nname = 'x'\n").find("s.toml:1") == 0);
}

TEST_CASE("bytes that would upset the parser are refused before it sees them") {
  CHECK(fault_of("[machine]\nname = 'x'\n[\x01").find("s.toml:3: a control character") == 0);
  CHECK(fault_of("[machine]\n\xC3\xA9 = 1\n").find("s.toml:2: a letter outside ASCII") == 0);
  CHECK(fault_of("[machine]\nname = '\xFF'\n").find("s.toml:2: text that is not UTF-8") == 0);
  CHECK(fault_of("\r[machine]").find("control character") != std::string::npos);
  // Where toml++ 3.3 asserts, and where it takes letters outside ASCII for impossible.
  CHECK(fault_of("\n[+machine]\n").find("s.toml:2: ") == 0);
  CHECK(fault_of("[machine]\nname = 0\"\"\"\xC3\xA4\"\"\"\n").find("s.toml:2: ") == 0);
}

TEST_CASE("keys of a million parts and names of a million letters are refused, quickly and in a short line") {
  // toml++ takes such keys and visits its tables by recursion: once a stack overflow.
  std::string parts;
  for (int i = 0; i < 1'000'000; ++i) parts += "a.";
  const std::string many = "s.toml:1: a key of too many parts";
  CHECK(fault_of(parts + "a = 1\n").find(many) == 0);
  CHECK(fault_of("[" + parts + "a]\n").find(many) == 0);
  CHECK(fault_of("x = [\"\"\"text\"\"\"\", { " + parts + "a = 1 }]\n").find(many) == 0);
  CHECK(fault_of("[machine]\nname = 'a. b. c. d. e. f. g. h. i. j. k. l. m. n. o. p. q. r.'\n").empty());

  const std::string name(1'000'000, 'n');
  const std::string fault = fault_of("[machine]\n" + name + " = 1\n");
  CHECK(fault.find("s.toml:2: unknown key 'machine.nnn") == 0);
  CHECK(fault.size() < 2000);
  CHECK(nearest_name(name, std::vector<std::string_view>{name}).empty());
}

TEST_CASE("a settings file that is not there is an error of usage") {
  const TemporaryFolder folder;
  CHECK_THROWS_AS(Settings::read(folder / "none.toml", keys), Error);
  CHECK_THROWS_AS(Settings::read(folder.path(), keys), Error);
}
