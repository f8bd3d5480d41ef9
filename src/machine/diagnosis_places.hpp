#pragma once

#include <optional>

#include "stillmass/machine/diagnosis_facts.hpp"

namespace stillmass::machine {

enum class Way { horizontal, vertical, axial };

// Which way a channel looks; nothing where it is not known (a signed axis other than the vertical one without the
// shaft's axis).
std::optional<Way> way(const ChannelFacts& channel, const Facts& facts);
// -1 for a direction with a minus sign.
double sign(const ChannelFacts& channel);
// Known not to look along the shaft, or not known at all.
bool may_be_radial(const ChannelFacts& channel, const Facts& facts);
// The other channels at the same place, and the channel itself.
std::vector<const ChannelFacts*> at_place(const ChannelFacts& channel, const Facts& facts);

// Two channels whose phases are compared.
enum class Pair { horizontal_vertical, axial_across_coupling, radial_across_coupling, axial_ends };
std::optional<Pair> pair_named(std::string_view name);
struct ChannelPair {
  const ChannelFacts* first = nullptr;
  const ChannelFacts* second = nullptr;
};
// The pairs of that kind: at the channel's place, across the coupling (drive ends, where the places say so), at two
// ends of the channel's rotor.
std::vector<ChannelPair> pairs(Pair kind, const ChannelFacts& channel, const Facts& facts);

// How far apart two channels are at an order, degrees from 0 to 180, each turned to its positive direction. Nothing
// where they share no reference, or where the coherence is too low.
std::optional<double> phase_apart_deg(const ChannelPair& pair, double order, const Facts& facts,
                                      double least_coherence);

}  // namespace stillmass::machine
