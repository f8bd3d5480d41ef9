#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "machine/diagnosis_lines.hpp"

namespace stillmass::machine {

// What an observation is about, measured: the number, and words for the sentence about it.
struct Observed {
  double value = 0.0;
  std::string line;   // "1x at 24.63 Hz: 6.50 mm/s r.m.s."
  std::string where;  // channels or places it was compared between
};

// A word of the closed list of measures.
struct MeasureWord {
  std::string_view name;
  std::string_view first;  // what its arguments are: "line", "pair", "side bands" or empty
  std::string_view second;
  // Nothing where the facts do not say.
  std::optional<Observed> (*observe)(const Question& question, const Measure& measure);
};

std::span<const MeasureWord> measure_words();
const MeasureWord* measure_named(std::string_view name);
// True where the text may stand for such an argument.
bool is_argument(std::string_view kind, std::string_view text);

// The mode that multiplies the line most at this channel; nullptr where none is known.
const modal::Mode* strongest_mode(double frequency_hz, const Question& question);
// The limit below which the question's channel runs smoothly, m/s.
double smooth_limit(const ChannelFacts& channel, const DiagnosisRules& rules);

}  // namespace stillmass::machine
