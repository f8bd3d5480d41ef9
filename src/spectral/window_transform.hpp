#pragma once

#include <cstddef>
#include <span>

#include "stillmass/spectral/window.hpp"

namespace stillmass::spectral {

/// a_k of w(t) = sum over k of (-1)^k a_k cos(2 pi k t / n).
std::span<const double> coefficients(Window window);

/// Transform of the continuous window about its centre, x bins from the line, 1 at x = 0: what is left of a tone's
/// amplitude on a line x bins away. Signed.
double transform(Window window, double x);

/// Bound of |transform| around x, outside the main lobe.
double transform_envelope(Window window, double x);

/// Correlation of white noise on two lines m apart, about the window's centre. Signed.
double line_correlation(Window window, std::size_t m);

}  // namespace stillmass::spectral
