#pragma once

#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace stillmass::base {

/// The closed list of what can be wrong with a recording, a test, or the road from them to an answer.
enum class Code {
  // of recordings
  clipped,
  overload,
  dropout,
  flat_line,
  missing_values,
  not_a_number,
  gap,
  uneven_times,
  odd_lines,
  truncated,
  no_signal,
  spikes,
  drift,
  low_frequency_slope,
  mains_hum,
  few_bits,
  near_noise_floor,
  aliasing_suspected,
  identical_channels,
  unit_suspected,
  channels_swapped,
  mounting_resonance,
  calibration_off,
  // of tests
  double_hit,
  weak_hit,
  too_few_lines,
  short_decay,
  low_coherence,
  sweep_too_fast,
  missing_pulses,
  extra_pulses,
  no_pulses,
  // of the chain from test to specification
  unit_assumed,
  calibration_assumed,
  stopped_shift_assumed,
  methods_disagree,
  outside_model,
  limit_unknown,
  target_not_met,
  close_modes,
  speed_on_split,
  // of the machine
  unbalance,
  resonance,
  vane_pass_force,
  electrical_force,
  misalignment,
  looseness,
  bent_shaft,
  bearing_damage,
  cavitation_like,
  soft_foot,
  // of what a spectrum can stand for
  speed_varies,
  single_shocks,
};

/// What a code stands for, in words for people.
struct CodeText {
  Code code;
  std::string_view name;  ///< lower-case words joined by hyphens: the code of the JSON result
  std::string_view seen;
  std::string_view likely_cause;
  std::string_view next_step;
};

/// Every code once, in the order of the enumeration.
std::span<const CodeText> all_codes();
const CodeText& text(Code code);

enum class Strength { weak, fair, strong };
std::string_view name(Strength strength);

/// One thing found: a code, where and when, how sure, and the evidence with numbers.
struct Finding {
  Code code;
  std::string text;       ///< one sentence with the numbers seen
  std::string channel{};  ///< empty: the recording or test as a whole
  std::optional<double> from_s{};
  std::optional<double> to_s{};
  Strength strength = Strength::strong;
  std::vector<std::string> evidence{};
  std::vector<std::string> confirm{};  ///< what to measure or try that would confirm it
  std::vector<std::string> refute{};   ///< what would refute it
};

}  // namespace stillmass::base
