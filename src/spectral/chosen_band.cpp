#include <algorithm>
#include <cmath>
#include <string>
#include <utility>

#include <fmt/format.h>

#include "spectral/band_search_limits.hpp"

namespace stillmass::spectral {

base::Answer<BandKurtosis> chosen_band(const BandSearch& search) {
  if (search.chosen) return search.bands[*search.chosen];
  const base::Interval range = search_range_hz(search.rate_hz, search.options);
  if (!has_room(range, search.options.least_width_hz)) {
    return base::Refusal{
        "rate-too-low",
        fmt::format("at {:.6g} samples a second the recording is good to {:.0f} Hz: that leaves no band "
                    "above {:.0f} Hz in which blows of a bearing could ring",
                    search.rate_hz, range.hi, range.lo),
        fmt::format("record with at least {:.0f} samples a second, 25600 if the recorder can, or name a "
                    "band yourself",
                    std::ceil(2.0 * 2.56 * range.lo))};
  }
  if (search.stretches < least_stretches || search.stretch_s < least_stretch_s) {
    return base::Refusal{"recording-too-short",
                         fmt::format("the recording gives {} stretches of {:.2g} s; a single thump cannot be told from "
                                     "blows that repeat",
                                     search.stretches, search.stretch_s),
                         "record at least 10 s without a gap"};
  }
  const auto by = [](auto member) {
    return [member](const BandKurtosis& a, const BandKurtosis& b) { return a.*member < b.*member; };
  };
  const auto best = *std::max_element(search.bands.begin(), search.bands.end(), by(&BandKurtosis::kurtosis));
  const auto thump = *std::max_element(search.bands.begin(), search.bands.end(), by(&BandKurtosis::strongest));
  std::string seen = fmt::format(
      "no band from {:.0f} to {:.0f} Hz is impulsive: the greatest kurtosis is {:.2g}, and noise "
      "reaches {:.2g} there",
      range.lo, range.hi, best.kurtosis, best.limit);
  if (thump.strongest > 10.0 * thump.limit && thump.strongest > 1.0) {
    seen += fmt::format("; the stretch about {:.1f} s alone has {:.2g}, a single thump", thump.strongest_at_s,
                        thump.strongest);
  }
  return base::Refusal{"no-impulsive-band", std::move(seen),
                       "name a band if you expect a modulation there, or measure closer to the bearing"};
}

}  // namespace stillmass::spectral
