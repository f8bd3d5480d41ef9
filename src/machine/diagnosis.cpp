#include "stillmass/machine/diagnosis.hpp"

#include <algorithm>
#include <cmath>
#include <string>

#include <fmt/format.h>

#include "machine/diagnosis_measures.hpp"
#include "machine/diagnosis_places.hpp"
#include "machine/diagnosis_sentences.hpp"

namespace stillmass::machine {
namespace {

using base::Finding;
using base::Strength;

// A finding before those of one cause are put together: which cause, and how large it is here.
struct Claim {
  std::string cause;
  double size = 0.0;
  Finding finding;
};

void cap(Strength& strength, const std::optional<Strength>& at) {
  if (at) strength = std::min(strength, *at);
}

bool holds(const Observation& observation, double value) {
  return (!observation.at_least || value >= *observation.at_least) &&
         (!observation.at_most || value <= *observation.at_most);
}

// Every level is below its limit. Nothing where no level is known.
std::optional<bool> runs_smoothly(const Facts& facts, const DiagnosisRules& rules) {
  std::optional<bool> out;
  for (const ChannelFacts& channel : facts.channels) {
    if (!channel.velocity) continue;
    out = out.value_or(true) && channel.velocity->value < smooth_limit(channel, rules);
  }
  return out;
}

// Holds the observations of a rule against the facts and gathers what they say.
class Case {
 public:
  Case(const Rule& rule, const Question& question) : rule_(rule), question_(question) {}

  // False where a required observation is missing.
  bool hear(const Observation& observation) {
    const auto observed = measure_named(observation.measure.name)->observe(question_, observation.measure);
    if (!observed) return hear_unknown(observation);
    const bool held = holds(observation, observed->value);
    const bool contradicts = observation.role == Role::contradicts;
    if (held) points_ += contradicts ? -observation.weight : observation.weight;
    if (held == contradicts) cap(most_, observation.cap_against);
    const std::string& words = held ? observation.holds : observation.fails;
    if (!words.empty()) add(evidence_, evidence(words, *observed, observation, question_));
    return held || observation.role != Role::required;
  }

  std::optional<Claim> claim(std::string cause, std::optional<bool> smooth) const {
    if (points_ < rule_.weak) return {};
    if (smooth.value_or(false) && !rule_.smooth) return {};
    Claim out;
    out.cause = std::move(cause);
    out.size = size();
    out.finding.code = rule_.code;
    out.finding.channel = question_.channel->name;
    out.finding.text = headline(rule_.text, question_);
    Strength strength = points_ >= rule_.strong ? Strength::strong
                        : points_ >= rule_.fair ? Strength::fair
                                                : Strength::weak;
    out.finding.evidence = evidence_;
    if (smooth.value_or(false)) {
      cap(strength, rule_.smooth);
      out.finding.evidence.emplace_back("every level is below its limit: the machine runs smoothly");
    }
    out.finding.strength = std::min(strength, most_);
    out.finding.confirm = confirm_;
    for (const std::string& each : rule_.confirm) add(out.finding.confirm, each);
    out.finding.refute = rule_.refute;
    return out;
  }

 private:
  // By which the channels are ranked where the strength is the same: the line, the bearing's depth, the noise.
  double size() const {
    if (rule_.focus == Focus::bearing) return bearing_rhythm(question_).value_or(BearingRhythm{}).depth;
    if (rule_.focus == Focus::channel && rule_.line.empty()) return question_.channel->noise_acceleration.value_or(0.0);
    return seen_line("line", *question_.channel, question_).amplitude();
  }

  static void add(std::vector<std::string>& to, const std::string& sentence) {
    if (std::find(to.begin(), to.end(), sentence) == to.end()) to.push_back(sentence);
  }

  bool hear_unknown(const Observation& observation) {
    cap(most_, observation.cap_unknown);
    if (!observation.measure_next.empty()) add(confirm_, observation.measure_next);
    return observation.role != Role::required;
  }

  const Rule& rule_;
  const Question& question_;
  double points_ = 0.0;
  Strength most_ = Strength::strong;
  std::vector<std::string> evidence_;
  std::vector<std::string> confirm_;
};

// Asks a rule of everything that it can be asked of.
std::vector<Claim> claims(const Rule& rule, const Facts& facts, const DiagnosisRules& rules) {
  std::vector<Claim> out;
  const std::optional<bool> smooth = runs_smoothly(facts, rules);
  const auto ask = [&](const Question& question, std::string cause) {
    Case one(rule, question);
    for (const Observation& observation : rule.observations) {
      if (!one.hear(observation)) return;
    }
    if (auto claim = one.claim(std::move(cause), smooth)) out.push_back(std::move(*claim));
  };
  for (const ChannelFacts& channel : facts.channels) {
    if (rule.directions == "radial" && !may_be_radial(channel, facts)) continue;
    if (rule.directions == "axial" && way(channel, facts) != Way::axial) continue;
    Question question{&facts, &rules, &channel, rule.line, {}, nullptr, nullptr};
    switch (rule.focus) {
      case Focus::channel:
        ask(question, {});
        break;
      case Focus::bearing:
        for (const Bearing& bearing : facts.machine.bearings) {
          const auto& near = channel.bearings;
          if (near.empty() && !channel.on_bearing_housing) continue;
          if (!near.empty() && std::find(near.begin(), near.end(), bearing.name) == near.end()) continue;
          question.bearing = &bearing;
          ask(question, bearing.name);
        }
        break;
      case Focus::line_and_mode:
        for (std::size_t f = 0; f < facts.forcing.size(); ++f) {
          question.forcing = f;
          for (std::size_t m = 0; m < facts.modes.size(); ++m) {
            question.mode = &facts.modes[m];
            ask(question, fmt::format("{} {}", f, m));
          }
        }
        break;
    }
  }
  return out;
}

bool says_more(const Claim& a, const Claim& b) {
  if (a.finding.strength != b.finding.strength) return a.finding.strength > b.finding.strength;
  return a.size > b.size;
}

}  // namespace

std::vector<Finding> diagnose(const Facts& facts, const DiagnosisRules& rules) {
  std::vector<Claim> kept;
  for (const Rule& rule : rules.rules) {
    for (Claim& claim : claims(rule, facts, rules)) {
      const auto same = std::find_if(kept.begin(), kept.end(), [&](const Claim& each) {
        return each.finding.code == claim.finding.code && each.cause == claim.cause;
      });
      if (same == kept.end()) {
        kept.push_back(std::move(claim));
      } else if (says_more(claim, *same)) {
        *same = std::move(claim);
      }
    }
  }
  std::stable_sort(kept.begin(), kept.end(),
                   [](const Claim& a, const Claim& b) { return a.finding.strength > b.finding.strength; });
  std::vector<Finding> out;
  for (Claim& each : kept) out.push_back(std::move(each.finding));
  return out;
}

}  // namespace stillmass::machine
