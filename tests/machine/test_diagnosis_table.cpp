#include <set>

#include "stillmass/base/error.hpp"
#include "stillmass/base/tables.hpp"
#include "stillmass/machine/diagnosis_rules.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

// The table of the program with one piece replaced; the piece must be there.
std::string with(const std::string& piece, const std::string& other) {
  std::string table(base::table_text("diagnosis.toml"));
  const std::size_t at = table.find(piece);
  REQUIRE(at != std::string::npos);
  return table.replace(at, piece.size(), other);
}

// The one-line error of a table.
base::Error error_of(const std::string& table) {
  try {
    machine::diagnosis_rules(table, "table.toml");
  } catch (const base::Error& error) {
    return error;
  }
  FAIL("no error");
  throw;
}

}  // namespace

TEST_CASE("every rule has its source, what confirms it and what refutes it, and every code of a fault has a rule") {
  const auto rules = machine::diagnosis_rules();
  std::set<base::Code> codes;
  for (const machine::Rule& rule : rules.rules) {
    CAPTURE(rule.name);
    codes.insert(rule.code);
    CHECK_FALSE(rule.source.empty());
    CHECK_FALSE(rule.confirm.empty());
    CHECK_FALSE(rule.refute.empty());
    CHECK_FALSE(rule.observations.empty());
    CHECK(rule.fair <= rule.strong);
    bool evidence = false;
    for (const auto& each : rule.observations) evidence = evidence || !each.holds.empty();
    CHECK(evidence);
  }
  for (auto code = base::Code::unbalance; code <= base::Code::soft_foot;
       code = static_cast<base::Code>(static_cast<int>(code) + 1)) {
    CAPTURE(base::text(code).name);
    CHECK(codes.contains(code));
  }
}

TEST_CASE("a measure that the program does not know is an error with its line") {
  const auto error = error_of(with("\"share(1x)\"", "\"loudness(1x)\""));
  CHECK(error.problem.find("unknown measure 'loudness'") != std::string::npos);
  CHECK(error.where == "table.toml");
  REQUIRE(error.line > 60);
  CHECK(error_of(with("\"share(1x)\"", "\"share(1x, 2x)\"")).problem.find("number of arguments") != std::string::npos);
  CHECK(error_of(with("\"share(1x)\"", "\"share(loud)\"")).problem.find("'loud' is not a line") != std::string::npos);
  CHECK(error_of(with("\"share(1x)\"", "\"share(1x\"")).problem.find("closing bracket") != std::string::npos);
}

TEST_CASE("a row without a source, a wrong code, placeholder or limit is an error") {
  CHECK(error_of(with("code = \"unbalance\"", "code = \"lopsided\"")).problem.find("lopsided") != std::string::npos);
  CHECK(error_of(with("text = \"{line}\"", "text = \"{colour}\"")).problem.find("{colour}") != std::string::npos);
  CHECK(error_of(with("points = [0, 2, 4]", "points = [4, 2, 0]")).problem.find("ascending") != std::string::npos);
  CHECK(error_of(with("at_least = 1.0\nrole", "role")).problem.find("without a limit") != std::string::npos);
  CHECK(error_of(with("name = \"smooth-mm-s\"", "name = \"smoth\"")).problem.find("unknown limit") !=
        std::string::npos);
  CHECK(error_of(with("source = \"common practice; strength", "sauce = \"common practice; strength"))
            .problem.find("sauce") != std::string::npos);
}
