#include "machine/diagnosis_lines.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/machine/bearing.hpp"

namespace stillmass::machine {
namespace {

constexpr int greatest_order = 20;        // that is looked for
constexpr double greatest_slip = 0.03;    // of a bearing: 1 to 2 % is common practice, and some for the geometry
constexpr int greatest_bearing_line = 5;  // multiples of a bearing frequency that are counted
constexpr auto lines_by_kind =
    std::to_array<std::string_view>({"vane pass", "twice vane pass", "electrical", "pole pass", "line"});

bool fits_kind(const Forcing& forcing, std::string_view line, const Facts& facts) {
  if (line == "electrical") {  // twice the line or drive frequency, not its double
    return forcing.kind == ForcingKind::electrical &&
           std::none_of(facts.forcing.begin(), facts.forcing.end(), [&](const Forcing& each) {
             return each.kind == ForcingKind::electrical && each.frequency.value < 0.99 * forcing.frequency.value;
           });
  }
  if (line == "pole pass") return forcing.kind == ForcingKind::pole_pass;
  if (forcing.kind != ForcingKind::vane_pass || !forcing.order || !facts.machine.vanes) return false;
  const double vanes = *facts.machine.vanes;
  return std::abs(*forcing.order - (line == "vane pass" ? vanes : 2.0 * vanes)) < 1e-3;
}

bool fits(const Forcing& forcing, std::string_view line, std::optional<double> order, const Facts& facts) {
  if (!order) return fits_kind(forcing, line, facts);
  return forcing.name == line ||
         (forcing.kind == ForcingKind::rotation && forcing.order && std::abs(*forcing.order - *order) < 1e-3);
}

// How far a tone may stand from where it is expected.
double reach(const CausedTone& tone, double expected_u, double line_hz) {
  return std::max(line_hz, 3.0 * std::hypot(tone.frequency.u.value_or(line_hz / std::sqrt(12.0)), expected_u));
}

bool at_order(const CausedTone& tone, double order, const ChannelFacts& channel, const Facts& facts) {
  if (!facts.speed) return false;
  const double u = order * facts.speed->u.value_or(0.0);
  return std::abs(tone.frequency.value - order * facts.speed->value) <= reach(tone, u, channel.line_hz);
}

bool counts(double order, const Question& question) {
  const ChannelFacts& channel = *question.channel;
  if (!channel.velocity) return false;
  const SeenLine seen = seen_line(fmt::format("{:g}x", order), channel, question);
  return seen.amplitude() >= question.rules->harmonic_share * channel.velocity->value && seen.tone != nullptr;
}

// A multiple of the running speed, or of twice the line frequency: not a bearing's doing.
bool is_common(const EnvelopeTone& tone, const Question& question) {
  const Facts& facts = *question.facts;
  const double line_hz = std::max(question.channel->line_hz, 3.0 * tone.frequency.u.value_or(0.0));
  const double turns = tone.frequency.value / facts.speed->value;
  const bool multiple = std::abs(turns - std::round(turns)) * facts.speed->value <= line_hz && std::round(turns) >= 1.0;
  return multiple || std::any_of(facts.forcing.begin(), facts.forcing.end(), [&](const Forcing& each) {
           return each.kind == ForcingKind::electrical &&
                  std::abs(each.frequency.value - tone.frequency.value) <= line_hz;
         });
}

// The deepest tone of the envelope between two frequencies.
const EnvelopeTone* deepest(base::Interval band_hz, const Question& question) {
  const EnvelopeTone* out = nullptr;
  for (const EnvelopeTone& tone : *question.channel->envelope) {
    if (tone.in_background || !band_hz.contains(tone.frequency.value) || is_common(tone, question)) continue;
    if (out == nullptr || tone.depth > out->depth) out = &tone;
  }
  return out;
}

BearingRhythm rhythm_of(std::string part, double expected_hz, const Question& question) {
  BearingRhythm out{std::move(part), expected_hz, 0, 0.0};
  const double line_hz = question.channel->line_hz;
  const double slip = std::max(line_hz, greatest_slip * expected_hz);
  const EnvelopeTone* first = deepest({expected_hz - slip, expected_hz + 0.5 * slip}, question);
  if (first == nullptr) return out;
  out.frequency_hz = first->frequency.value;
  out.lines = 1;
  out.depth = first->depth;
  for (int k = 2; k <= greatest_bearing_line; ++k) {
    const double middle = k * first->frequency.value;
    const double half = std::max(line_hz, k * 3.0 * first->frequency.u.value_or(0.0)) + 2e-3 * middle;
    if (deepest({middle - half, middle + half}, question) != nullptr) ++out.lines;
  }
  return out;
}

}  // namespace

std::optional<double> order_of(std::string_view name) {
  if (name.size() < 2 || name.back() != 'x') return {};
  return base::parse_number(name.substr(0, name.size() - 1));
}

bool is_line(std::string_view name) {
  return order_of(name) || std::find(lines_by_kind.begin(), lines_by_kind.end(), name) != lines_by_kind.end();
}

SeenLine seen_line(std::string_view line, const ChannelFacts& channel, const Question& question) {
  const Facts& facts = *question.facts;
  if (line == "line" && !question.line.empty()) line = question.line;
  const bool bound = line == "line";
  SeenLine out;
  if (bound && !question.forcing) return out;
  out.name = bound ? facts.forcing[*question.forcing].name : std::string(line);
  const std::optional<double> order = order_of(line);
  const bool listed = bound || !order || std::any_of(facts.forcing.begin(), facts.forcing.end(), [&](const auto& each) {
                        return fits(each, line, order, facts);
                      });
  for (const CausedTone& tone : channel.tones) {
    if (tone.in_background) continue;
    bool belongs = false;
    if (!tone.cause.candidates.empty()) {
      const std::size_t first = tone.cause.candidates.front();
      belongs = bound ? first == *question.forcing : fits(facts.forcing[first], line, order, facts);
    } else if (!listed) {
      belongs = at_order(tone, *order, channel, facts);
    }
    if (belongs && (out.tone == nullptr || tone.amplitude.value > out.tone->amplitude.value)) out.tone = &tone;
  }
  if (out.tone != nullptr && !out.tone->cause.candidates.empty()) {
    out.name = facts.forcing[out.tone->cause.candidates.front()].name;
  }
  return out;
}

std::string sentence(const SeenLine& line) {
  if (line.tone == nullptr) return fmt::format("no {} line stands out", line.name);
  return fmt::format("{} at {:.2f} Hz: {:.2f} mm/s r.m.s.", line.name, line.tone->frequency.value,
                     1000.0 * line.tone->amplitude.value);
}

std::optional<double> pole_pass_hz(const Facts& facts) {
  const Machine& machine = facts.machine;
  if (machine.supply != Supply::line || !machine.line_frequency_hz || !machine.motor_poles || !facts.speed) return {};
  const double slip = 2.0 * *machine.line_frequency_hz / *machine.motor_poles - facts.speed->value;
  if (!(slip > 0.0)) return {};
  return *machine.motor_poles * slip;
}

int side_bands_seen(const SeenLine& carrier, double spacing_hz, const ChannelFacts& channel) {
  if (carrier.tone == nullptr) return 0;
  const double at = carrier.tone->frequency.value;
  int from_tones = 0;
  for (const int k : {-2, -1, 1, 2}) {
    from_tones += std::any_of(channel.tones.begin(), channel.tones.end(), [&](const CausedTone& tone) {
      return &tone != carrier.tone && !tone.in_background &&
             std::abs(tone.frequency.value - at - k * spacing_hz) <= reach(tone, 0.02, channel.line_hz);
    });
  }
  int from_families = 0;
  for (const ToneFamily& family : channel.families) {
    if (!family.carrier || std::abs(family.carrier->value - at) > channel.line_hz) continue;
    if (std::abs(family.spacing.value - spacing_hz) > channel.line_hz) continue;
    from_families = std::max(from_families, static_cast<int>(family.numbers.size()));
  }
  return std::max(from_tones, from_families);
}

int harmonics_seen(const Question& question) {
  int out = 0;
  for (int k = 2; k <= greatest_order; ++k) out += counts(k, question);
  return out;
}

int half_orders_seen(const Question& question) {
  int out = 0;
  for (int k = 0; k <= 5; ++k) out += counts(k + 0.5, question);
  return out;
}

std::optional<BearingRhythm> bearing_rhythm(const Question& question) {
  const Facts& facts = *question.facts;
  if (question.bearing == nullptr || !question.channel->envelope || !facts.speed) return {};
  const std::optional<double> ratio = facts.machine.shaft_ratio(question.bearing->shaft);
  if (!ratio) return {};
  const BearingOrders orders = bearing_orders(*question.bearing);
  const double turns_hz = *ratio * facts.speed->value;
  BearingRhythm best;
  for (const auto& [part, order] : {std::pair{"outer ring", orders.outer}, std::pair{"inner ring", orders.inner},
                                    std::pair{"rolling element", orders.element}, std::pair{"cage", orders.cage}}) {
    BearingRhythm each = rhythm_of(part, order * turns_hz, question);
    if (std::pair(each.lines, each.depth) > std::pair(best.lines, best.depth)) best = std::move(each);
  }
  return best;
}

}  // namespace stillmass::machine
