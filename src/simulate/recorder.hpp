#pragma once

#include <cstddef>

namespace stillmass::simulate {

/// The fine rate of the integration over the recorder's rate: the least power of two that gives 30 kHz or more, and at
/// least 2, so that the recorder's own filter decides what is recorded.
std::size_t oversampling(double rate_hz);

/// What a recorder of that many bits keeps of a fraction of full scale: clipped at the ends, rounded to its step.
double stored(double fraction, int bits);

}  // namespace stillmass::simulate
