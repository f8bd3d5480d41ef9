#include "machine/diagnosis_sentences.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/machine/diagnosis.hpp"

namespace stillmass::machine {
namespace {

constexpr auto placeholders =
    std::to_array<std::string_view>({"line", "value", "percent", "where", "channel", "limit", "bearing", "mode"});

// The text between the next pair of braces from `from` on, with where it begins; npos: none.
struct Placeholder {
  std::size_t begin = std::string_view::npos;
  std::string_view name;
};
Placeholder next_placeholder(std::string_view sentence, std::size_t from) {
  const std::size_t begin = sentence.find('{', from);
  const std::size_t end = begin == std::string_view::npos ? begin : sentence.find('}', begin);
  if (end == std::string_view::npos) return {};
  return {begin, sentence.substr(begin + 1, end - begin - 1)};
}

template <class Fill>
std::string filled(std::string_view sentence, const Fill& fill) {
  std::string out;
  std::size_t from = 0;
  for (Placeholder next = next_placeholder(sentence, 0); next.begin != std::string_view::npos;
       next = next_placeholder(sentence, from)) {
    out += sentence.substr(from, next.begin - from);
    out += fill(next.name);
    from = next.begin + next.name.size() + 2;
  }
  return out += sentence.substr(from);
}

std::string limits(const Observation& observation) {
  if (observation.at_least && observation.at_most) {
    return fmt::format("{:g} to {:g}", *observation.at_least, *observation.at_most);
  }
  return fmt::format("{:g}", observation.at_least ? *observation.at_least : *observation.at_most);
}

std::string number(double value) {
  return std::abs(value) >= 20.0 ? fmt::format("{:.0f}", value) : base::plain(value, 2);
}

std::string line_with_share(const Question& question) {
  const SeenLine line = seen_line("line", *question.channel, question);
  std::string out = sentence(line);
  const auto& level = question.channel->velocity;
  if (line.tone == nullptr || !level || !(level->value > 0.0)) return out;
  return out + fmt::format(", {:.0f} % of the level there", 100.0 * std::min(1.0, line.amplitude() / level->value));
}

std::string mode_words(const Question& question) {
  const SeenLine line = seen_line("line", *question.channel, question);
  if (question.mode == nullptr || line.tone == nullptr) return "a natural frequency";
  const double at = line.tone->frequency.value;
  const double natural = question.mode->frequency.value;
  return fmt::format("{:.1f} % from the natural frequency {:.2f} Hz: amplification {:.1f}",
                     100.0 * std::abs(at - natural) / natural, natural,
                     amplification(at, natural, question.mode->damping_ratio.value));
}

std::string from_question(std::string_view name, const Question& question) {
  if (name == "channel") return question.channel->name;
  if (name == "bearing") return question.bearing != nullptr ? question.bearing->name : "a bearing";
  if (name == "mode") return mode_words(question);
  if (name == "line") return line_with_share(question);
  return {};
}

}  // namespace

std::string_view unknown_placeholder(std::string_view sentence) {
  std::size_t from = 0;
  for (Placeholder next = next_placeholder(sentence, 0); next.begin != std::string_view::npos;
       next = next_placeholder(sentence, from)) {
    if (std::find(placeholders.begin(), placeholders.end(), next.name) == placeholders.end()) return next.name;
    from = next.begin + next.name.size() + 2;
  }
  return {};
}

std::string evidence(std::string_view sentence, const Observed& observed, const Observation& observation,
                     const Question& question) {
  return filled(sentence, [&](std::string_view name) -> std::string {
    if (name == "line" && !observed.line.empty()) return observed.line;
    if (name == "where") return observed.where;
    if (name == "value") return number(observed.value);
    if (name == "percent") return fmt::format("{:.0f} %", 100.0 * observed.value);
    if (name == "limit") return limits(observation);
    return from_question(name, question);
  });
}

std::string headline(std::string_view sentence, const Question& question) {
  return filled(sentence, [&](std::string_view name) { return from_question(name, question); });
}

}  // namespace stillmass::machine
