#include "stillmass/machine/diagnosis.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/tables.hpp"

namespace stillmass::machine {
namespace {

using base::Code;
using base::Finding;
using base::KeyType;
using base::Strength;

constexpr auto keys = std::to_array<base::Key>({
    {"row", KeyType::tables, "", true, "", "one limit", "", {}},
    {"row.rule", KeyType::text, "", true, "", "which limit", "", {}},
    {"row.value", KeyType::number, "", true, "", "its value", "", {0, 1e6}},
    {"row.help", KeyType::text, "", false, "", "what it means", "", {}},
    {"row.source", KeyType::text, "", true, "", "where it comes from", "", {}},
});

// Of a line: its place in the list of peaks, its forcing, its share of the channel's level.
struct Line {
  const CausedPeak* peak = nullptr;
  const Forcing* forcing = nullptr;
  std::optional<double> share;
};

std::optional<double> share_of(const CausedPeak& peak, const std::vector<ChannelLevel>& levels) {
  for (const ChannelLevel& level : levels) {
    if (level.channel == peak.channel && level.velocity > 0.0) {
      return std::min(1.0, peak.peak.amplitude / level.velocity);
    }
  }
  return {};
}

// For every forcing that a peak was put down to, the channel where it is largest.
std::vector<Line> largest_lines(const Facts& facts) {
  std::vector<Line> out;
  for (std::size_t f = 0; f < facts.forcing.size(); ++f) {
    const CausedPeak* largest = nullptr;
    for (const CausedPeak& each : facts.peaks) {
      if (each.cause.candidates.empty() || each.cause.candidates.front() != f) continue;
      if (largest == nullptr || each.peak.amplitude > largest->peak.amplitude) largest = &each;
    }
    if (largest != nullptr) out.push_back({largest, &facts.forcing[f], share_of(*largest, facts.levels)});
  }
  return out;
}

// The mode that multiplies this frequency most.
const modal::Mode* strongest_mode(double frequency_hz, const std::vector<modal::Mode>& modes) {
  const auto strongest = std::max_element(modes.begin(), modes.end(), [&](const auto& a, const auto& b) {
    return amplification(frequency_hz, a.frequency.value, a.damping_ratio.value) <
           amplification(frequency_hz, b.frequency.value, b.damping_ratio.value);
  });
  return strongest == modes.end() ? nullptr : &*strongest;
}

double mm_s(double metres_per_second) { return 1000.0 * metres_per_second; }

std::string level_sentence(const Line& line) {
  std::string text = fmt::format("{} at {:.2f} Hz: {:.2f} mm/s r.m.s.", line.forcing->name,
                                 line.peak->peak.frequency.value, mm_s(line.peak->peak.amplitude));
  if (line.share) text += fmt::format(", {:.0f} % of the level there", 100.0 * *line.share);
  return text;
}

std::string amplification_sentence(double frequency_hz, const modal::Mode& mode) {
  const double natural = mode.frequency.value;
  const base::Interval range = amplification_range(frequency_hz, mode);
  std::string text = fmt::format(
      "the mode at {:.2f} Hz ({} machine) stands {:.1f} % {} it and multiplies it by {:.1f}", natural,
      mode.state.empty() ? "state unknown" : mode.state, 100.0 * std::abs(natural - frequency_hz) / frequency_hz,
      natural >= frequency_hz ? "above" : "below", amplification(frequency_hz, natural, mode.damping_ratio.value));
  if (mode.frequency.u) text += fmt::format(" ({:.1f} to {:.1f} within its uncertainty)", range.lo, range.hi);
  return text;
}

std::optional<Code> force_code(const Forcing& forcing) {
  if (forcing.kind == ForcingKind::rotation && forcing.order == 1.0) return Code::unbalance;
  if (forcing.kind == ForcingKind::vane_pass) return Code::vane_pass_force;
  if (forcing.kind == ForcingKind::electrical) return Code::electrical_force;
  return {};
}

// A force that makes the vibration of a channel by itself.
std::optional<Finding> force_finding(const Line& line, const Facts& facts, const DiagnosisRules& rules) {
  const auto code = force_code(*line.forcing);
  if (!code || !line.share || *line.share < rules.dominance_fair) return {};
  const double frequency = line.peak->peak.frequency.value;
  Finding out;
  out.code = *code;
  out.channel = line.peak->channel;
  out.text = level_sentence(line);
  out.strength = *line.share >= rules.dominance_strong ? Strength::strong : Strength::fair;
  out.evidence.push_back(out.text);
  const modal::Mode* mode = strongest_mode(frequency, facts.modes);
  if (mode == nullptr) {
    out.strength = std::min(out.strength, Strength::fair);
    out.evidence.push_back("no natural frequency is known: a resonance may multiply it");
  } else if (amplification(frequency, mode->frequency.value, mode->damping_ratio.value) >= rules.amplification_fair) {
    out.strength = std::min(out.strength, Strength::fair);
    out.evidence.push_back(amplification_sentence(frequency, *mode));
  } else {
    out.evidence.push_back(fmt::format("no known mode multiplies it by {:.1f} or more; nearest in effect: {:.2f} Hz",
                                       rules.amplification_fair, mode->frequency.value));
  }
  if (line.peak->cause.ambiguous) {
    out.strength = Strength::weak;
    out.evidence.push_back("cause not certain: " + line.peak->cause.text);
  }
  return out;
}

// A forcing line that a mode multiplies.
std::optional<Finding> resonance_finding(const Line& line, const modal::Mode& mode, const DiagnosisRules& rules) {
  const double frequency = line.peak->peak.frequency.value;
  const double natural = mode.frequency.value;
  const double gain = amplification(frequency, natural, mode.damping_ratio.value);
  if (gain < rules.amplification_fair) return {};
  const double bandwidth = 2.0 * mode.damping_ratio.value * natural;
  const double away = std::abs(frequency - natural) / bandwidth;
  const bool dominates = line.share && *line.share >= rules.dominance_fair;
  Finding out;
  out.code = Code::resonance;
  out.channel = line.peak->channel;
  out.text = fmt::format("{} at {:.2f} Hz stands {:.1f} % from the natural frequency {:.2f} Hz: amplification {:.1f}",
                         line.forcing->name, frequency, 100.0 * std::abs(frequency - natural) / natural, natural, gain);
  out.strength = !dominates                                                            ? Strength::weak
                 : gain >= rules.amplification_strong && away <= rules.near_bandwidths ? Strength::strong
                                                                                       : Strength::fair;
  out.evidence.push_back(level_sentence(line));
  out.evidence.push_back(amplification_sentence(frequency, mode));
  out.evidence.push_back(fmt::format("{:.2f} half-power bandwidths of {:.2f} Hz away; damping ratio {:.4f}", away,
                                     bandwidth, mode.damping_ratio.value));
  if (line.peak->cause.ambiguous) out.evidence.push_back("cause not certain: " + line.peak->cause.text);
  return out;
}

}  // namespace

DiagnosisRules diagnosis_rules() {
  DiagnosisRules rules;
  const std::array<std::pair<std::string_view, double*>, 5> known = {{
      {"dominance-strong", &rules.dominance_strong},
      {"dominance-fair", &rules.dominance_fair},
      {"amplification-strong", &rules.amplification_strong},
      {"amplification-fair", &rules.amplification_fair},
      {"near-bandwidths", &rules.near_bandwidths},
  }};
  for (const base::Settings::Table& row : base::table_rows("diagnosis.toml", keys)) {
    const auto rule =
        std::find_if(known.begin(), known.end(), [&](const auto& each) { return each.first == *row.text("rule"); });
    if (rule == known.end()) row.refuse("rule", "an unknown rule");
    *rule->second = *row.number("value");
  }
  for (const auto& each : known) {
    if (!(*each.second > 0.0)) {
      throw base::Error(base::ErrorKind::internal, "data/tables/diagnosis.toml", "no rule " + std::string(each.first));
    }
  }
  return rules;
}

double amplification(double frequency_hz, double natural_hz, double damping_ratio) {
  const double r = frequency_hz / natural_hz;
  return 1.0 / std::abs(std::complex<double>(1.0 - r * r, 2.0 * damping_ratio * r));
}

base::Interval amplification_range(double frequency_hz, const modal::Mode& mode) {
  const double natural = mode.frequency.value;
  const double zeta = mode.damping_ratio.value;
  const double reach = 2.0 * mode.frequency.u.value_or(0.0);
  const base::Interval natural_range{std::max(1e-3 * natural, natural - reach), natural + reach};
  const double at_lo = amplification(frequency_hz, natural_range.lo, zeta);
  const double at_hi = amplification(frequency_hz, natural_range.hi, zeta);
  // Highest where the forcing frequency is natural * sqrt(1 - 2 zeta^2), if the mode can be there.
  const double worst = frequency_hz / std::sqrt(std::max(0.01, 1.0 - 2.0 * zeta * zeta));
  const double at_worst = amplification(frequency_hz, natural_range.clamped(worst), zeta);
  return {std::min(at_lo, at_hi), std::max({at_lo, at_hi, at_worst})};
}

std::vector<Finding> diagnose(const Facts& facts, const DiagnosisRules& rules) {
  std::vector<Finding> out;
  for (const Line& line : largest_lines(facts)) {
    for (const modal::Mode& mode : facts.modes) {
      if (auto found = resonance_finding(line, mode, rules)) out.push_back(std::move(*found));
    }
    if (auto found = force_finding(line, facts, rules)) out.push_back(std::move(*found));
  }
  std::stable_sort(out.begin(), out.end(), [](const Finding& a, const Finding& b) { return a.strength > b.strength; });
  return out;
}

}  // namespace stillmass::machine
