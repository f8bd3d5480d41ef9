#include <fstream>
#include <string>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass;
using namespace stillmass::tests;

// tests/broken/recording/cases.txt: file | exit code | part of the message.
TEST_CASE("every broken recording is refused in one line that says what is wrong") {
  const auto folder = demo_file("../../tests/broken/recording");
  std::ifstream cases(folder / "cases.txt");
  REQUIRE(cases);
  int seen = 0;
  for (std::string line; std::getline(cases, line);) {
    if (line.empty() || line.front() == '#') continue;
    const auto parts = base::split(line, '|');
    REQUIRE(parts.size() == 3);
    const std::string file(base::trimmed(parts[0]));
    INFO(file);
    ++seen;
    try {
      recording::open(folder / file);
      FAIL_CHECK("opened");
    } catch (const base::Error& error) {
      const std::string text = error.what();
      INFO(text);
      CHECK(text.find(base::trimmed(parts[2])) != std::string::npos);
      CHECK(text.find('\n') == std::string::npos);
      CHECK_FALSE(error.remedy.empty());
      const auto code = error.kind == base::ErrorKind::file ? 3 : 2;
      CHECK(base::parse_integer(parts[1]) == code);
    }
  }
  CHECK(seen >= 18);
}
