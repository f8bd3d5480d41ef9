#include "stillmass/machine/diagnosis_rules.hpp"

#include <algorithm>
#include <array>

#include "stillmass/base/error.hpp"
#include "stillmass/base/settings.hpp"
#include "stillmass/base/tables.hpp"
#include "stillmass/base/text.hpp"

#include "machine/diagnosis_sentences.hpp"

namespace stillmass::machine {
namespace {

using base::KeyType;
using base::Strength;
using Table = base::Settings::Table;

constexpr auto keys = std::to_array<base::Key>({
    {"limit", KeyType::tables, "", true, "", "a limit that rules share", "", {}},
    {"limit.name", KeyType::text, "", true, "", "which", "", {}},
    {"limit.value", KeyType::number, "", true, "", "its value", "", {0, 1e6}},
    {"limit.help", KeyType::text, "", true, "", "what it means", "", {}},
    {"limit.source", KeyType::text, "", true, "", "where it comes from", "", {}},
    {"row", KeyType::tables, "", true, "", "one finding", "", {}},
    {"row.code", KeyType::text, "", true, "", "its code", "", {}},
    {"row.name", KeyType::text, "", true, "", "what it is called", "", {}},
    {"row.about", KeyType::text, "", false, "channel", "what it is asked of", "channel|bearing|line and mode", {}},
    {"row.line", KeyType::text, "", false, "", "the line that it is about", "", {}},
    {"row.directions", KeyType::text, "", false, "", "of the channels asked", "radial|axial", {}},
    {"row.text", KeyType::text, "", true, "", "the finding's sentence", "", {}},
    {"row.points", KeyType::numbers, "", true, "", "for weak, fair, strong", "", {-100, 100}},
    {"row.smooth", KeyType::text, "", false, "none", "strongest on a smooth machine", "none|weak|fair|strong", {}},
    {"row.confirm", KeyType::texts, "", true, "", "what would confirm it", "", {}},
    {"row.refute", KeyType::texts, "", true, "", "what would refute it", "", {}},
    {"row.source", KeyType::text, "", true, "", "where the rule comes from", "", {}},
    {"row.observe", KeyType::tables, "", true, "", "an observation", "", {}},
    {"row.observe.measure", KeyType::text, "", true, "", "a word of the list", "", {}},
    {"row.observe.at_least", KeyType::number, "", false, "", "it holds from here", "", {}},
    {"row.observe.at_most", KeyType::number, "", false, "", "it holds up to here", "", {}},
    {"row.observe.role", KeyType::text, "", true, "", "what it does", "required|supports|contradicts", {}},
    {"row.observe.weight", KeyType::number, "", false, "", "points", "", {0, 100}},
    {"row.observe.against", KeyType::text, "", false, "", "cap where it speaks against", "weak|fair", {}},
    {"row.observe.unknown", KeyType::text, "", false, "", "cap where it is not known", "weak|fair", {}},
    {"row.observe.holds", KeyType::text, "", false, "", "evidence where it holds", "", {}},
    {"row.observe.fails", KeyType::text, "", false, "", "evidence where it does not", "", {}},
    {"row.observe.measure_next", KeyType::text, "", false, "", "what to measure where it is not known", "", {}},
});

std::optional<Strength> strength(const Table& table, std::string_view key) {
  const std::string word = table.text(key).value_or("");
  for (const Strength each : {Strength::weak, Strength::fair, Strength::strong}) {
    if (word == base::name(each)) return each;
  }
  return {};
}

std::string sentence(const Table& table, std::string_view key) {
  std::string out = table.text(key).value_or("");
  const std::string_view unknown = unknown_placeholder(out);
  if (!unknown.empty()) table.refuse(key, "no placeholder {" + std::string(unknown) + "}");
  return out;
}

// "ratio(2x, 1x)".
Measure measure(const Table& table) {
  const std::string given = *table.text("measure");
  const std::size_t open = given.find('(');
  Measure out;
  out.name = base::trimmed(std::string_view(given).substr(0, open));
  if (open != std::string::npos) {
    if (given.back() != ')') table.refuse("measure", "no closing bracket in '" + given + "'");
    for (const std::string_view each :
         base::split(std::string_view(given).substr(open + 1, given.size() - open - 2), ',')) {
      out.arguments.emplace_back(base::trimmed(each));
    }
  }
  const MeasureWord* word = measure_named(out.name);
  if (word == nullptr) table.refuse("measure", "an unknown measure '" + out.name + "'");
  const std::array<std::string_view, 2> kinds = {word->first, word->second};
  const std::size_t wanted = kinds[0].empty() ? 0 : kinds[1].empty() ? 1 : 2;
  if (out.arguments.size() != wanted) table.refuse("measure", "a wrong number of arguments in '" + given + "'");
  for (std::size_t i = 0; i < wanted; ++i) {
    if (!is_argument(kinds[i], out.arguments[i])) {
      table.refuse("measure", "'" + out.arguments[i] + "' is not a " + std::string(kinds[i]));
    }
  }
  return out;
}

Observation observation(const Table& table) {
  Observation out;
  out.measure = measure(table);
  out.at_least = table.number("at_least");
  out.at_most = table.number("at_most");
  if (!out.at_least && !out.at_most) table.refuse("measure", "an observation without a limit");
  if (out.at_least && out.at_most && *out.at_least > *out.at_most) table.refuse("at_most", "below at_least");
  const std::string role = *table.text("role");
  out.role = role == "required" ? Role::required : role == "supports" ? Role::supports : Role::contradicts;
  out.weight = table.number("weight").value_or(out.role == Role::required ? 0.0 : 1.0);
  out.cap_against = strength(table, "against");
  out.cap_unknown = strength(table, "unknown");
  out.holds = sentence(table, "holds");
  out.fails = sentence(table, "fails");
  out.measure_next = table.text("measure_next").value_or("");
  return out;
}

base::Code code(const Table& row) {
  const std::string wanted = *row.text("code");
  const auto all = base::all_codes();
  const auto at = std::find_if(all.begin(), all.end(), [&](const auto& each) { return each.name == wanted; });
  if (at == all.end()) row.refuse("code", "an unknown code '" + wanted + "'");
  return at->code;
}

Rule rule(const Table& row) {
  Rule out;
  out.code = code(row);
  out.name = *row.text("name");
  const std::string about = row.text("about").value_or("channel");
  out.focus = about == "bearing" ? Focus::bearing : about == "channel" ? Focus::channel : Focus::line_and_mode;
  out.line = row.text("line").value_or("");
  if (!out.line.empty() && (out.line == "line" || !is_line(out.line))) {
    row.refuse("line", "an unknown line '" + out.line + "'");
  }
  if (!out.line.empty() && out.focus != Focus::channel)
    row.refuse("line", "a row about a channel has a line, no other");
  out.directions = row.text("directions").value_or("");
  out.text = sentence(row, "text");
  const std::vector<double> points = row.numbers("points");
  if (points.size() != 3 || !std::is_sorted(points.begin(), points.end())) {
    row.refuse("points", "three ascending numbers");
  }
  out.weak = points[0];
  out.fair = points[1];
  out.strong = points[2];
  out.smooth = strength(row, "smooth");
  out.confirm = row.texts("confirm");
  out.refute = row.texts("refute");
  out.source = *row.text("source");
  const bool has_line = !out.line.empty() || out.focus == Focus::line_and_mode;
  for (const Table& each : row.tables("observe")) {
    out.observations.push_back(observation(each));
    const std::vector<std::string>& given = out.observations.back().measure.arguments;
    if (!has_line && std::find(given.begin(), given.end(), "line") != given.end()) {
      each.refuse("measure", "the row has no line");
    }
  }
  return out;
}

}  // namespace

DiagnosisRules diagnosis_rules(std::string_view table, const std::string& name) {
  DiagnosisRules out;
  const base::Settings settings = base::Settings::parse(table, name, keys);
  const std::array<std::pair<std::string_view, double*>, 3> limits = {{
      {"smooth-mm-s", &out.smooth},
      {"least-coherence", &out.least_coherence},
      {"harmonic-share", &out.harmonic_share},
  }};
  for (const Table& row : settings.root().tables("limit")) {
    const auto at =
        std::find_if(limits.begin(), limits.end(), [&](const auto& each) { return each.first == *row.text("name"); });
    if (at == limits.end()) row.refuse("name", "an unknown limit");
    *at->second = *row.number("value");
  }
  for (const auto& [word, value] : limits) {
    if (!(*value > 0.0)) throw base::Error(base::ErrorKind::usage, name, "no limit " + std::string(word));
  }
  out.smooth *= 1e-3;
  for (const Table& row : settings.root().tables("row")) out.rules.push_back(rule(row));
  return out;
}

DiagnosisRules diagnosis_rules() {
  const std::string name = "data/tables/diagnosis.toml";
  try {
    return diagnosis_rules(base::table_text("diagnosis.toml"), name);
  } catch (const base::Error& error) {  // a wrong table is a fault of the program
    throw base::Error(base::ErrorKind::internal, error.where, error.problem, error.remedy, error.line);
  }
}

}  // namespace stillmass::machine
