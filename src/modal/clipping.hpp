#pragma once

#include <optional>
#include <span>

#include "stillmass/recording/channel.hpp"

namespace stillmass::modal {

/// The level (distance from the channel's offset) at which the samples are cut off: at full scale of the stored sample,
/// or flat for three samples and more (and two more than the signal usually keeps a value) at an extreme from which the
/// signal then departs by more than four of its least steps (a smooth peak that is merely coarse in its numbers departs
/// by less than two). Nothing where neither is seen.
std::optional<double> clipped_level(std::span<const double> samples, const recording::Channel& channel);

}  // namespace stillmass::modal
