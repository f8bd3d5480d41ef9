#pragma once

#include "stillmass/base/answer.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/tacho.hpp"

namespace stillmass::rotation {

/// Once-per-turn instants from the phase of the 1x line itself, where there is no tacho: Hann windows of `window_s`
/// every quarter of it, each centred on the frequency that the last two told. Ends where the line drowns (three times
/// what stands beside it). The angle has an arbitrary zero. Refused (`no-tacho`): the line cannot be followed for ten
/// turns.
base::Answer<Pulses> pulses_of_line(const recording::Reader& reader, std::size_t channel, recording::FrameRange range,
                                    double speed_hz, double window_s, const base::Context& context);

}  // namespace stillmass::rotation
