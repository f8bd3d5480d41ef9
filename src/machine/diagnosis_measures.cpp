#include "machine/diagnosis_measures.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/machine/diagnosis.hpp"

#include "machine/diagnosis_places.hpp"

namespace stillmass::machine {
namespace {

using Result = std::optional<Observed>;

constexpr double greatest_ratio = 99.0;  // stated where the smaller of two lines does not stand out at all

double ratio_of(double a, double b) {
  if (!(a > 0.0)) return 0.0;
  return b > 0.0 ? std::min(greatest_ratio, a / b) : greatest_ratio;
}

SeenLine line_at(const Question& question, const std::string& line) {
  return seen_line(line, *question.channel, question);
}

Result share(const Question& question, const Measure& measure) {
  const auto& level = question.channel->velocity;
  if (!level || !(level->value > 0.0)) return {};
  const SeenLine line = line_at(question, measure.arguments[0]);
  return Observed{std::min(1.0, line.amplitude() / level->value), sentence(line), {}};
}

Result excess(const Question& question, const Measure& measure) {
  const SeenLine line = line_at(question, measure.arguments[0]);
  return Observed{line.amplitude() / smooth_limit(*question.channel, *question.rules), sentence(line), {}};
}

// The channel's level over its limit of smooth running.
Result level_excess(const Question& question, const Measure&) {
  const auto& level = question.channel->velocity;
  if (!level) return {};
  return Observed{level->value / smooth_limit(*question.channel, *question.rules), {}, {}};
}

// Of the line's largest amplitude anywhere on the machine.
Result of_largest(const Question& question, const Measure& measure) {
  double most = 0.0;
  for (const ChannelFacts& each : question.facts->channels) {
    most = std::max(most, seen_line(measure.arguments[0], each, question).amplitude());
  }
  const SeenLine line = line_at(question, measure.arguments[0]);
  return Observed{most > 0.0 ? line.amplitude() / most : 0.0, sentence(line), {}};
}

Result ratio(const Question& question, const Measure& measure) {
  const SeenLine a = line_at(question, measure.arguments[0]);
  const SeenLine b = line_at(question, measure.arguments[1]);
  if (a.tone == nullptr && b.tone == nullptr) return {};
  return Observed{ratio_of(a.amplitude(), b.amplitude()), sentence(a), sentence(b)};
}

// Amplitudes of the line at the channel's place, the way that `wanted` picks.
struct Strongest {
  const ChannelFacts* channel = nullptr;
  SeenLine line;
};
std::vector<Strongest> at_place_of(const Question& question, const std::string& line, bool axial) {
  std::vector<Strongest> out;
  for (const ChannelFacts* each : at_place(*question.channel, *question.facts)) {
    const std::optional<Way> looks = way(*each, *question.facts);
    if (looks && (*looks == Way::axial) == axial) out.push_back({each, seen_line(line, *each, question)});
  }
  std::stable_sort(out.begin(), out.end(),
                   [](const auto& a, const auto& b) { return a.line.amplitude() > b.line.amplitude(); });
  return out;
}

Observed compared(const Strongest& a, const Strongest& b) {
  return {ratio_of(a.line.amplitude(), b.line.amplitude()), sentence(a.line),
          fmt::format("{} {:.2f} mm/s, {} {:.2f} mm/s", a.channel->name, 1000.0 * a.line.amplitude(), b.channel->name,
                      1000.0 * b.line.amplitude())};
}

Result axial_ratio(const Question& question, const Measure& measure) {
  const auto axial = at_place_of(question, measure.arguments[0], true);
  const auto radial = at_place_of(question, measure.arguments[0], false);
  if (axial.empty() || radial.empty()) return {};
  if (axial[0].line.tone == nullptr && radial[0].line.tone == nullptr) return {};
  return compared(axial[0], radial[0]);
}

Result radial_ratio(const Question& question, const Measure& measure) {
  const auto radial = at_place_of(question, measure.arguments[0], false);
  if (radial.size() < 2 || radial[0].line.tone == nullptr) return {};
  return compared(radial.front(), radial.back());
}

Result harmonics(const Question& question, const Measure&) {
  if (!question.channel->velocity || !question.facts->speed) return {};
  return Observed{static_cast<double>(harmonics_seen(question)), {}, {}};
}

Result half_orders(const Question& question, const Measure&) {
  if (!question.channel->velocity || !question.facts->speed) return {};
  return Observed{static_cast<double>(half_orders_seen(question)), {}, {}};
}

Result side_bands(const Question& question, const Measure& measure) {
  const std::optional<double> spacing = measure.arguments[1] == "pole pass" ? pole_pass_hz(*question.facts)
                                        : question.facts->speed ? std::optional(question.facts->speed->value)
                                                                : std::nullopt;
  const SeenLine carrier = line_at(question, measure.arguments[0]);
  // Closer than the window's lobe they would hide in the carrier.
  if (!spacing || carrier.tone == nullptr || *spacing < 2.0 * question.channel->line_hz) return {};
  return Observed{static_cast<double>(side_bands_seen(carrier, *spacing, *question.channel)), sentence(carrier),
                  fmt::format("{:.2f} Hz", *spacing)};
}

// Of the pairs whose phase is known, the one that moves most.
Result phase(const Question& question, const Measure& measure) {
  const std::optional<Pair> kind = pair_named(measure.arguments[0]);
  const std::string& name = measure.arguments[1];
  const std::optional<double> order = order_of(name == "line" ? question.line : name);
  if (!kind || !order) return {};
  Result out;
  double most = 0.0;
  for (const ChannelPair& pair : pairs(*kind, *question.channel, *question.facts)) {
    const auto apart = phase_apart_deg(pair, *order, *question.facts, question.rules->least_coherence);
    const SeenLine a = seen_line(name, *pair.first, question);
    const SeenLine b = seen_line(name, *pair.second, question);
    const double moves = a.amplitude() * b.amplitude();
    if (!apart || !(moves > most)) continue;
    most = moves;
    out = Observed{*apart, sentence(a), pair.first->name + " and " + pair.second->name};
  }
  return out;
}

// Degrees from 90: 0 where the motion turns, 90 where it goes along a line.
Result phase_off_90(const Question& question, const Measure& measure) {
  Result out = phase(question, measure);
  if (out) out->value = std::abs(out->value - 90.0);
  return out;
}

Result number(const std::optional<double>& value) {
  if (!value) return {};
  return Observed{*value, {}, {}};
}

Result share_of(const std::optional<double>& part, const std::optional<double>& whole) {
  if (!part || !whole || !(*whole > 0.0)) return {};
  return Observed{std::min(1.0, *part / *whole), {}, {}};
}

Result noise_share(const Question& question, const Measure&) {
  const auto& level = question.channel->velocity;
  return share_of(question.channel->noise_velocity, level ? std::optional(level->value) : std::nullopt);
}

Result noise_acceleration(const Question& question, const Measure&) {
  return number(question.channel->noise_acceleration);
}

Result noise_acceleration_share(const Question& question, const Measure&) {
  return share_of(question.channel->noise_acceleration, question.channel->acceleration);
}

Result crest_factor(const Question& question, const Measure&) { return number(question.channel->crest_factor); }
Result kurtosis(const Question& question, const Measure&) { return number(question.channel->kurtosis); }

Result envelope_lines(const Question& question, const Measure&) {
  const auto rhythm = bearing_rhythm(question);
  if (!rhythm) return {};
  return Observed{static_cast<double>(rhythm->lines), fmt::format("{} {:.2f} Hz", rhythm->part, rhythm->frequency_hz),
                  question.bearing->name};
}

Result envelope_depth(const Question& question, const Measure& measure) {
  Result out = envelope_lines(question, measure);
  if (out) out->value = bearing_rhythm(question)->depth;
  return out;
}

// The greatest depth of any bearing's rhythm at this channel.
Result any_envelope_depth(const Question& question, const Measure&) {
  Result out;
  for (const Bearing& bearing : question.facts->machine.bearings) {
    Question each = question;
    each.bearing = &bearing;
    const auto rhythm = bearing_rhythm(each);
    if (rhythm && (!out || rhythm->depth > out->value)) out = Observed{rhythm->depth, rhythm->part, bearing.name};
  }
  return out;
}

const modal::Mode* mode_of(const Question& question, const SeenLine& line) {
  if (question.mode != nullptr || line.tone == nullptr) return question.mode;
  return strongest_mode(line.tone->frequency.value, question);
}

Result amplified(const Question& question, const Measure& measure) {
  const SeenLine line = line_at(question, measure.arguments[0]);
  const modal::Mode* mode = mode_of(question, line);
  if (mode == nullptr || line.tone == nullptr) return {};
  const double at = line.tone->frequency.value;
  const double natural = mode->frequency.value;
  const base::Interval range = amplification_range(at, *mode);
  std::string words =
      fmt::format("the mode at {:.2f} Hz ({} machine) stands {:.1f} % {} it and multiplies it by {:.1f}", natural,
                  mode->state.empty() ? "state unknown" : mode->state, 100.0 * std::abs(natural - at) / at,
                  natural >= at ? "above" : "below", amplification(at, natural, mode->damping_ratio.value));
  if (mode->frequency.u) words += fmt::format(" ({:.1f} to {:.1f} within its uncertainty)", range.lo, range.hi);
  return Observed{amplification(at, natural, mode->damping_ratio.value), sentence(line), std::move(words)};
}

Result bandwidths(const Question& question, const Measure& measure) {
  const SeenLine line = line_at(question, measure.arguments[0]);
  const modal::Mode* mode = mode_of(question, line);
  if (mode == nullptr || line.tone == nullptr) return {};
  const double width = 2.0 * mode->damping_ratio.value * mode->frequency.value;
  return Observed{std::abs(line.tone->frequency.value - mode->frequency.value) / width, sentence(line),
                  fmt::format("{:.2f} Hz; damping ratio {:.4f}", width, mode->damping_ratio.value)};
}

Result modes_known(const Question& question, const Measure&) {
  return Observed{static_cast<double>(question.facts->modes.size()), {}, {}};
}

Result certain(const Question& question, const Measure& measure) {
  const SeenLine line = line_at(question, measure.arguments[0]);
  if (line.tone == nullptr) return {};
  return Observed{line.tone->cause.ambiguous ? 0.0 : 1.0, sentence(line), line.tone->cause.text};
}

Result speed_exponent(const Question& question, const Measure&) {
  const auto& run = question.channel->run;
  if (!run || !run->exponent) return {};
  return Observed{run->exponent->value, {}, {}};
}

Result slow_roll(const Question& question, const Measure&) {
  return question.channel->run ? number(question.channel->run->slow_roll) : Result();
}

Result run_phase_change(const Question& question, const Measure&) {
  const auto& run = question.channel->run;
  if (!run || !run->phase_change) return {};
  return Observed{std::abs(*run->phase_change) * 180.0 / std::numbers::pi, {}, {}};
}

Result outcome(TestOutcome test) {
  if (test == TestOutcome::not_made) return {};
  return Observed{test == TestOutcome::confirmed ? 1.0 : 0.0, {}, {}};
}

Result power_cut(const Question& question, const Measure&) { return outcome(question.channel->power_cut); }
Result foot_test(const Question& question, const Measure&) { return outcome(question.facts->soft_foot); }

Result is_pump(const Question& question, const Measure&) {
  const MachineKind kind = question.facts->machine.kind;
  if (kind == MachineKind::general) return {};
  return Observed{kind == MachineKind::pump ? 1.0 : 0.0, {}, {}};
}

constexpr auto words = std::to_array<MeasureWord>({
    {"share", "line", "", share},
    {"excess", "line", "", excess},
    {"level_excess", "", "", level_excess},
    {"of_largest", "line", "", of_largest},
    {"ratio", "line", "line", ratio},
    {"axial_ratio", "line", "", axial_ratio},
    {"radial_ratio", "line", "", radial_ratio},
    {"harmonics", "", "", harmonics},
    {"half_orders", "", "", half_orders},
    {"side_bands", "line", "spacing", side_bands},
    {"phase", "pair", "line", phase},
    {"phase_off_90", "pair", "line", phase_off_90},
    {"noise_share", "", "", noise_share},
    {"noise_acceleration", "", "", noise_acceleration},
    {"noise_acceleration_share", "", "", noise_acceleration_share},
    {"crest_factor", "", "", crest_factor},
    {"kurtosis", "", "", kurtosis},
    {"envelope_lines", "", "", envelope_lines},
    {"envelope_depth", "", "", envelope_depth},
    {"any_envelope_depth", "", "", any_envelope_depth},
    {"amplification", "line", "", amplified},
    {"bandwidths", "line", "", bandwidths},
    {"modes_known", "", "", modes_known},
    {"certain", "line", "", certain},
    {"speed_exponent", "", "", speed_exponent},
    {"slow_roll", "", "", slow_roll},
    {"run_phase_change", "", "", run_phase_change},
    {"power_cut", "", "", power_cut},
    {"foot_test", "", "", foot_test},
    {"is_pump", "", "", is_pump},
});

}  // namespace

std::span<const MeasureWord> measure_words() { return words; }

const MeasureWord* measure_named(std::string_view name) {
  const auto at = std::find_if(words.begin(), words.end(), [&](const MeasureWord& each) { return each.name == name; });
  return at == words.end() ? nullptr : &*at;
}

bool is_argument(std::string_view kind, std::string_view text) {
  if (kind == "line") return is_line(text);
  if (kind == "pair") return pair_named(text).has_value();
  return text == "1x" || text == "pole pass";  // a spacing of side bands
}

const modal::Mode* strongest_mode(double frequency_hz, const Question& question) {
  const std::vector<modal::Mode>& modes = question.facts->modes;
  const auto strongest = std::max_element(modes.begin(), modes.end(), [&](const auto& a, const auto& b) {
    return amplification(frequency_hz, a.frequency.value, a.damping_ratio.value) <
           amplification(frequency_hz, b.frequency.value, b.damping_ratio.value);
  });
  return strongest == modes.end() ? nullptr : &*strongest;
}

double smooth_limit(const ChannelFacts& channel, const DiagnosisRules& rules) {
  return channel.smooth_limit.value_or(rules.smooth);
}

}  // namespace stillmass::machine
