#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "stillmass/machine/diagnosis_facts.hpp"
#include "stillmass/machine/diagnosis_rules.hpp"

namespace stillmass::machine {

// What a rule is asked of: one channel, and the bearing, the forcing line or the mode where the rule's focus binds one.
struct Question {
  const Facts* facts = nullptr;
  const DiagnosisRules* rules = nullptr;
  const ChannelFacts* channel = nullptr;
  std::string line;                    // what "line" stands for; empty: the forcing below
  std::optional<std::size_t> forcing;  // of a rule about every forcing line
  const modal::Mode* mode = nullptr;
  const Bearing* bearing = nullptr;
};

// Lines that a table may name: "1x", "2x", "0.5x", ..., "vane pass", "twice vane pass", "electrical", "pole pass", and
// "line" for the one that the rule is about.
bool is_line(std::string_view name);
// The order of "2x"; nothing for other lines.
std::optional<double> order_of(std::string_view name);

// A line at a channel: seen with its tone, or not.
struct SeenLine {
  std::string name;
  const CausedTone* tone = nullptr;

  double amplitude() const { return tone != nullptr ? tone->amplitude.value : 0.0; }
};

// The largest tone of the channel that was put down to the line first; tones of the background do not count. An order
// that the list of forcing frequencies does not hold is looked for among the tones without a cause.
SeenLine seen_line(std::string_view line, const ChannelFacts& channel, const Question& question);

// "1x at 24.63 Hz: 6.50 mm/s r.m.s.", or "no 2x line stands out".
std::string sentence(const SeenLine& line);

// Distance of pole-pass side bands, Hz: poles times slip speed.
std::optional<double> pole_pass_hz(const Facts& facts);

// Side bands of the line at that distance that the channel shows: from its tones and its families.
int side_bands_seen(const SeenLine& carrier, double spacing_hz, const ChannelFacts& channel);

// Multiples of the running speed from 2x up, and odd halves of it, that hold `harmonic_share` of the level.
int harmonics_seen(const Question& question);
int half_orders_seen(const Question& question);

// A bearing's fault frequency in the envelope of the channel: which part, how many of its multiples, how deep.
struct BearingRhythm {
  std::string part;  // "outer ring"
  double frequency_hz = 0.0;
  int lines = 0;
  double depth = 0.0;
};
// The part with the most lines, then the deepest; lines = 0: none. Nothing where there is no envelope or no speed.
std::optional<BearingRhythm> bearing_rhythm(const Question& question);

}  // namespace stillmass::machine
