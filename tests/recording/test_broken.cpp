#include <fstream>
#include <string>
#include <vector>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/recording/sample_quality.hpp"

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
  CHECK(seen >= 46);
}

// tests/broken/recording/warned.txt: file | code | from, s | to, s | part of the text.
TEST_CASE("every damaged recording that can be read is read, and says what is wrong from when to when") {
  const auto folder = demo_file("../../tests/broken/recording");
  std::ifstream cases(folder / "warned.txt");
  REQUIRE(cases);
  int seen = 0;
  for (std::string line; std::getline(cases, line);) {
    if (line.empty() || line.front() == '#') continue;
    const auto parts = base::split(line, '|');
    REQUIRE(parts.size() == 5);
    INFO(line);
    ++seen;
    const auto reader = recording::open(folder / base::trimmed(parts[0]));
    std::vector<base::Finding> findings = reader->recording().findings;
    for (const auto& quality : recording::sample_quality(*reader, {0, reader->recording().frames}, {})) {
      findings.insert(findings.end(), quality.findings.begin(), quality.findings.end());
    }
    bool met = false;
    for (const base::Finding& finding : findings) {
      if (base::text(finding.code).name != base::trimmed(parts[1])) continue;
      if (finding.text.find(base::trimmed(parts[4])) == std::string::npos) continue;
      const auto is_at = [](const std::optional<double>& time, std::string_view wanted) {
        const auto number = base::parse_number(wanted);
        return !number || (time && *time == Approx(*number).margin(1e-9));
      };
      met = met || (is_at(finding.from_s, parts[2]) && is_at(finding.to_s, parts[3]));
    }
    for (const base::Finding& finding : findings) {
      UNSCOPED_INFO(base::text(finding.code).name << ": " << finding.text << " from " << finding.from_s.value_or(-1)
                                                  << " to " << finding.to_s.value_or(-1));
    }
    CHECK(met);
    CHECK(all_samples(*reader)[0].size() == static_cast<std::size_t>(reader->recording().frames));
  }
  CHECK(seen >= 23);
}
