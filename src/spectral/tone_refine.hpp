#pragma once

#include <vector>

#include "stillmass/spectral/tone.hpp"

#include "spectral/line_noise.hpp"

namespace stillmass::spectral {

/// Fits again the tones into whose lines others leak (or their own images at negative frequency) by more than a tenth
/// of what noise does. In a block, lines hold the sum of the tones' transforms, each real about the block's middle; so
/// the mean power on line k is sum of P_j W_j(k)^2 + sum over pairs of c_ij W_i(k) W_j(k) + floor, with one real number
/// c_ij a pair, whatever the phases and however the blocks overlap. Place, power and the c of the three greatest leaks
/// are fitted by least squares to the lines of the lobe; the other tones' own powers are taken off. With the rectangle
/// every tone is fitted so. A fit that does not settle near the first estimate is dropped. What more than the
/// strongest 60 tones leak counts as noise. `tones`: strongest first.
void refine(const Spectrum& measured, const LineNoise& noise, std::vector<Tone>& tones);

}  // namespace stillmass::spectral
