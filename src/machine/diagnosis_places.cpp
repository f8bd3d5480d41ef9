#include "machine/diagnosis_places.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <numbers>
#include <utility>

#include "stillmass/base/text.hpp"

namespace stillmass::machine {
namespace {

constexpr auto end_words = std::to_array<std::string_view>({"de", "nde", "drive", "free", "ib", "ob"});
constexpr auto way_words = std::to_array<std::pair<std::string_view, std::string_view>>({
    {"h", "horizontal"},
    {"horizontal", "horizontal"},
    {"v", "vertical"},
    {"vertical", "vertical"},
    {"a", "axial"},
    {"axial", "axial"},
});

bool is_end(std::string_view word) {
  const bool number = !word.empty() && word.find_first_not_of("0123456789") == std::string_view::npos;
  return number || std::find(end_words.begin(), end_words.end(), word) != end_words.end();
}

std::string_view without_sign(std::string_view direction) {
  if (!direction.empty() && (direction.front() == '+' || direction.front() == '-')) direction.remove_prefix(1);
  return direction;
}

// The channel's place stands at the coupling: its last word is that of a drive end.
bool at_coupling(const ChannelFacts& channel) {
  const std::string place = base::lower(channel.place);
  const std::string word = place.substr(place.find_last_of("-_. ") + 1);
  return word == "de" || word == "drive" || word == "ib";
}

std::optional<std::complex<double>> against(const std::string& channel, const std::string& reference, double order,
                                            const Facts& facts, double least_coherence) {
  for (const PhaseFact& each : facts.phases) {
    if (std::abs(each.order - order) > 1e-3 || std::abs(each.ratio) == 0.0) continue;
    if (each.coherence && *each.coherence < least_coherence) continue;
    if (each.channel == channel && each.reference == reference) return each.ratio;
    if (each.channel == reference && each.reference == channel) return 1.0 / each.ratio;
  }
  return {};
}

}  // namespace

Placed placed(std::string_view point) {
  constexpr std::string_view joints = "-_. ";
  Placed out;
  std::string_view rest = base::trimmed(point);
  std::size_t joint = rest.find_last_of(joints);
  const std::string last = base::lower(joint == std::string_view::npos ? std::string_view() : rest.substr(joint + 1));
  for (const auto& [word, direction] : way_words) {
    if (last == word) out.direction = direction;
  }
  if (!out.direction.empty()) rest = rest.substr(0, joint);
  out.place = rest;
  joint = rest.find_last_of(joints);
  if (joint != std::string_view::npos && joint > 0 && is_end(base::lower(rest.substr(joint + 1)))) {
    out.rotor = rest.substr(0, joint);
  }
  return out;
}

std::optional<Way> way(const ChannelFacts& channel, const Facts& facts) {
  const std::string word = base::lower(without_sign(channel.direction));
  for (const auto& [name, direction] : way_words) {
    if (word != name) continue;
    return direction == "axial" ? Way::axial : direction == "vertical" ? Way::vertical : Way::horizontal;
  }
  if (word != "x" && word != "y" && word != "z") return {};
  if (facts.shaft_axis == word.front()) return Way::axial;
  if (facts.vertical_axis == word.front()) return Way::vertical;
  if (facts.shaft_axis) return Way::horizontal;
  return {};
}

double sign(const ChannelFacts& channel) {
  return !channel.direction.empty() && channel.direction.front() == '-' ? -1.0 : 1.0;
}

bool may_be_radial(const ChannelFacts& channel, const Facts& facts) { return way(channel, facts) != Way::axial; }

std::vector<const ChannelFacts*> at_place(const ChannelFacts& channel, const Facts& facts) {
  std::vector<const ChannelFacts*> out;
  for (const ChannelFacts& each : facts.channels) {
    if (&each == &channel || (!channel.place.empty() && each.place == channel.place)) out.push_back(&each);
  }
  return out;
}

std::optional<Pair> pair_named(std::string_view name) {
  if (name == "horizontal-vertical") return Pair::horizontal_vertical;
  if (name == "axial across coupling") return Pair::axial_across_coupling;
  if (name == "radial across coupling") return Pair::radial_across_coupling;
  if (name == "axial ends") return Pair::axial_ends;
  return {};
}

std::vector<ChannelPair> pairs(Pair kind, const ChannelFacts& channel, const Facts& facts) {
  std::vector<ChannelPair> out;
  const auto is = [&](const ChannelFacts& each, Way wanted) { return way(each, facts) == wanted; };
  for (std::size_t i = 0; i < facts.channels.size(); ++i) {
    for (std::size_t k = i + 1; k < facts.channels.size(); ++k) {
      const ChannelFacts& a = facts.channels[i];
      const ChannelFacts& b = facts.channels[k];
      if (a.place.empty() || b.place.empty()) continue;
      const bool both_known = way(a, facts) && way(b, facts);
      const bool same_way = both_known && way(a, facts) == way(b, facts);
      const bool axial = same_way && is(a, Way::axial);
      const bool two_rotors = !a.rotor.empty() && !b.rotor.empty() && a.rotor != b.rotor;
      bool fits = false;
      switch (kind) {
        case Pair::horizontal_vertical:
          fits = a.place == channel.place && b.place == channel.place && both_known && !same_way &&
                 !is(a, Way::axial) && !is(b, Way::axial);
          break;
        case Pair::axial_across_coupling:
          fits = two_rotors && axial;
          break;
        case Pair::radial_across_coupling:
          fits = two_rotors && same_way && !axial;
          break;
        case Pair::axial_ends:
          fits = axial && !a.rotor.empty() && a.rotor == b.rotor && a.rotor == channel.rotor && a.place != b.place;
          break;
      }
      if (fits) out.push_back({&a, &b});
    }
  }
  if (kind == Pair::axial_across_coupling || kind == Pair::radial_across_coupling) {
    const auto away = [](const ChannelPair& each) { return !at_coupling(*each.first) || !at_coupling(*each.second); };
    if (!std::all_of(out.begin(), out.end(), away)) std::erase_if(out, away);
  }
  return out;
}

std::optional<double> phase_apart_deg(const ChannelPair& pair, double order, const Facts& facts,
                                      double least_coherence) {
  const std::string& a = pair.first->name;
  const std::string& b = pair.second->name;
  std::optional<std::complex<double>> ratio = against(a, b, order, facts, least_coherence);
  for (const PhaseFact& each : facts.phases) {
    if (ratio) break;
    const auto first = against(a, each.reference, order, facts, least_coherence);
    const auto second = against(b, each.reference, order, facts, least_coherence);
    if (first && second) ratio = *first / *second;
  }
  if (!ratio) return {};
  return std::abs(std::arg(*ratio * sign(*pair.first) * sign(*pair.second))) * 180.0 / std::numbers::pi;
}

}  // namespace stillmass::machine
