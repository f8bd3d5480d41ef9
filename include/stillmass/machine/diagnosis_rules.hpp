#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/finding.hpp"

namespace stillmass::machine {

/// A number that an observation is about: a word of a closed list with what it is of, "ratio(2x, 1x)". The words stand
/// at the head of data/tables/diagnosis.toml.
struct Measure {
  std::string name;
  std::vector<std::string> arguments;
};

/// What an observation does to a finding.
enum class Role {
  required,     ///< no finding where it does not hold or is not known
  supports,     ///< adds its weight where it holds
  contradicts,  ///< takes its weight off where it holds
};

/// One observation of a rule: a measure held against limits.
struct Observation {
  Measure measure;
  std::optional<double> at_least;
  std::optional<double> at_most;
  Role role = Role::supports;
  double weight = 1.0;
  std::optional<base::Strength> cap_against;  ///< the finding is no stronger where it speaks against it
  std::optional<base::Strength> cap_unknown;  ///< the finding is no stronger where it is not known
  std::string holds;                          ///< evidence where it holds; placeholders as in the table's head
  std::string fails;                          ///< evidence where it does not; empty: not worth a sentence
  std::string measure_next;                   ///< what to measure where it is not known
};

/// What a rule is asked of: every channel, every bearing at every channel, or every forcing line with every mode.
enum class Focus { channel, bearing, line_and_mode };

/// One row of the table: a finding and its observations.
struct Rule {
  base::Code code = base::Code::unbalance;
  std::string name;  ///< of the row: "angular misalignment"
  Focus focus = Focus::channel;
  std::string line;        ///< the line that it is about, "1x": of several channels the one where it is largest leads
  std::string directions;  ///< "radial", "axial" or empty: of the channels it is asked of
  std::string text;        ///< the finding's sentence
  double weak = 0.0;       ///< points from which there is a finding
  double fair = 0.0;
  double strong = 0.0;
  std::optional<base::Strength> smooth;  ///< no stronger on a machine that runs smoothly; absent: no finding there
  std::vector<Observation> observations;
  std::vector<std::string> confirm;  ///< what would confirm it
  std::vector<std::string> refute;   ///< what would refute it
  std::string source;
};

/// The rules and the limits that they share, from data/tables/diagnosis.toml.
struct DiagnosisRules {
  std::vector<Rule> rules;
  double smooth = 0.0;           ///< m/s r.m.s.: below it a channel without a limit of its own runs smoothly
  double least_coherence = 0.0;  ///< of a phase that counts
  double harmonic_share = 0.0;   ///< of the level, from which a multiple of the running speed counts
};

/// The rules that travel inside the program.
DiagnosisRules diagnosis_rules();
/// The same from a table's text. Throws `Error` (usage) with the line: an unknown key, code, measure or line, a measure
/// with the wrong number of arguments, an observation without a limit, a row without a source.
DiagnosisRules diagnosis_rules(std::string_view table, const std::string& name);

}  // namespace stillmass::machine
