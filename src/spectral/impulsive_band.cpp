#include "stillmass/spectral/impulsive_band.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

#include "spectral/band_filter.hpp"
#include "spectral/band_search_limits.hpp"
#include "spectral/kurtosis_limit.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

constexpr double flank_share = 0.125;  // of the width of a band
constexpr std::size_t most_stretches = 64;

void check(const Recording& recording, std::span<const std::size_t> channels, const BandSearchOptions& options) {
  for (const std::size_t channel : channels) {
    if (channel >= recording.channels.size()) {
      throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", channel + 1),
                              fmt::format("it has {}", recording.channels.size()));
    }
  }
  const auto positive = [](double x) { return std::isfinite(x) && x > 0.0; };
  if (!(positive(options.lowest_hz) && options.highest_hz >= 0.0 && std::isfinite(options.highest_hz) &&
        positive(options.least_width_hz) && positive(options.stretch_s) && options.searched_s > 0.0 &&
        options.false_chance > 0.0 && options.false_chance < 1.0)) {
    throw base::usage_error({}, "a search for an impulsive band with limits that are not positive", {});
  }
}

/// Divisors 1, 2, 3, 4, 6, 8, 12, ... of the range while the bands are wide enough; nothing for less than an octave.
std::vector<base::Interval> bands_of(base::Interval range, double least_width) {
  std::vector<base::Interval> bands;
  if (!has_room(range, least_width)) return bands;
  for (std::size_t i = 0; i < 40; ++i) {
    const std::size_t power = std::size_t{1} << (i / 2);
    const std::size_t parts = i == 0 ? 1 : (i % 2 == 1 ? 2 * power : 3 * power / 2);
    const double width = range.width() / static_cast<double>(parts);
    if (width < least_width) break;
    for (std::size_t p = 0; p < parts; ++p) {
      const double lo = range.lo + static_cast<double>(p) * width;
      bands.push_back({lo, lo + width});
    }
  }
  return bands;
}

/// Blocks with the part of each that counts.
struct Cut {
  std::size_t length = 0;  ///< frames of a block
  std::size_t margin = 0;  ///< frames at each end that the circular filter spoils
};

Cut cut_of(const Recording& recording, FrameRange range, const BandSearchOptions& options) {
  // The narrowest filter rings for about 2 / flank; a tenth of a block at each end.
  const double margin_s = 2.0 / (flank_share * options.least_width_hz);
  const auto wanted = static_cast<std::size_t>(std::max(10.0 * margin_s * recording.rate_hz, 16.0));
  Cut cut;
  cut.length = fast_length_at_least(wanted);
  std::int64_t longest = 1;
  for (const recording::Segment& s : recording.segments) {
    longest = std::max(longest, std::min(s.first_frame + s.frames, range.end) - std::max(s.first_frame, range.begin));
  }
  cut.length = std::min(cut.length, fast_length_at_most(static_cast<std::size_t>(longest)));
  cut.margin = cut.length / 10;
  return cut;
}

/// All of a short recording, blocks spread evenly over a long one.
BlockPlan plan_for(const Recording& recording, FrameRange range, const BandSearchOptions& options) {
  const Cut cut = cut_of(recording, range, options);
  const double inner_s = static_cast<double>(cut.length - 2 * cut.margin) / recording.rate_hz;
  const double wanted = std::min(options.searched_s / inner_s, 1e6);
  const double overlap = 2.0 * static_cast<double>(cut.margin) / static_cast<double>(cut.length);
  if (static_cast<double>(range.size()) / recording.rate_hz <= wanted * inner_s) {
    return BlockPlan::overlapping(recording, range, cut.length, overlap);
  }
  const auto count = static_cast<std::size_t>(std::max(wanted, 1.0));
  const double room = static_cast<double>(range.size()) - static_cast<double>(cut.length);
  std::vector<std::int64_t> starts;
  for (std::size_t i = 0; i < count; ++i) {
    const double part = count > 1 ? static_cast<double>(i) / static_cast<double>(count - 1) : 0.0;
    const auto start = range.begin + static_cast<std::int64_t>(part * room);
    if (starts.empty() || start > starts.back()) starts.push_back(start);
  }
  return BlockPlan::triggered(recording, range, starts, cut.length);
}

/// How many stretches the range is cut into.
std::size_t stretches_of(const Recording& recording, FrameRange range, const BandSearchOptions& options) {
  const double seconds = static_cast<double>(range.size()) / recording.rate_hz;
  const double looked_at = std::min(seconds, options.searched_s);
  const auto whole = static_cast<std::size_t>(std::min(looked_at / options.stretch_s, 1e6));
  return std::clamp(whole, least_stretches, most_stretches);
}

}  // namespace

struct BandSearchConsumer::Setup {
  Recording recording;  ///< without its findings
  FrameRange range;
  std::vector<std::size_t> channels;
  BandSearchOptions options;
  std::size_t margin = 0;
  std::size_t stretches = 0;
  std::vector<base::Interval> bands_hz;
  std::vector<BandFilter> filters;
  std::size_t first_line = 0;  ///< of the lines that the filters touch
  std::size_t lines = 0;

  std::size_t stretch_of(std::int64_t frame) const {
    const auto part =
        static_cast<double>(frame - range.begin) / static_cast<double>(std::max<std::int64_t>(range.size(), 1));
    return std::min(static_cast<std::size_t>(part * static_cast<double>(stretches)), stretches - 1);
  }
};

struct BandSearchConsumer::Workspace {
  Workspace(const Setup& setup, std::size_t length) : transform(std::vector<double>(length, 1.0)) {
    std::size_t longest = 0;
    for (const BandFilter& filter : setup.filters) {
      ffts.try_emplace(filter.samples(), filter.samples());
      longest = std::max(longest, filter.samples());
    }
    squared.resize(longest);
  }
  BlockTransform transform;
  std::map<std::size_t, ComplexFft> ffts;
  std::vector<double> squared;
};

struct BandSearchConsumer::Sums {
  std::vector<double> power;           ///< of |X|^2 per line
  std::vector<double> second, fourth;  ///< of |x|^2 and |x|^4 over the inner samples, [band * stretches + stretch]
  std::vector<std::size_t> blocks;     ///< per stretch
};

BandSearchConsumer::BandSearchConsumer(const Recording& recording, FrameRange range, std::vector<std::size_t> channels,
                                       const BandSearchOptions& options)
    : BlockConsumer((check(recording, channels, options), plan_for(recording, range, options))),
      sums_(channels.size()) {
  auto setup = std::make_shared<Setup>();
  setup->recording = recording;
  setup->recording.findings.clear();
  setup->range = range;
  setup->channels = std::move(channels);
  setup->options = options;
  setup->margin = cut_of(recording, range, options).margin;
  setup->stretches = stretches_of(recording, range, options);
  setup->bands_hz = bands_of(search_range_hz(recording.rate_hz, options), options.least_width_hz);
  for (const base::Interval& band : setup->bands_hz) {
    setup->filters.emplace_back(plan().length(), recording.rate_hz, band, flank_share * band.width(), 0.0);
  }
  std::size_t end = 0;
  setup->first_line = plan().length();
  for (const BandFilter& filter : setup->filters) {
    setup->first_line = std::min(setup->first_line, filter.first_line());
    end = std::max(end, filter.first_line() + filter.gains().size());
  }
  setup->lines = setup->filters.empty() ? 0 : end - setup->first_line;
  setup_ = std::move(setup);
}

BandSearchConsumer::BandSearchConsumer(const BandSearchConsumer& whole, FrameRange owned)
    : BlockConsumer(whole, owned),
      setup_(whole.setup_),
      workspace_(std::make_unique<Workspace>(*whole.setup_, whole.plan().length())),
      sums_(whole.sums_.size()) {}

BandSearchConsumer::~BandSearchConsumer() = default;

std::unique_ptr<recording::Consumer> BandSearchConsumer::fresh(FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new BandSearchConsumer(*this, owned));
}

void BandSearchConsumer::take_block(const Block& block) {
  const Setup& setup = *setup_;
  const std::size_t stretch = setup.stretch_of(block.first_frame + static_cast<std::int64_t>(block.frames / 2));
  for (std::size_t c = 0; c < sums_.size(); ++c) {
    if (setup.filters.empty() || !block.is_valid(setup.channels[c])) continue;
    Sums& sums = sums_[c];
    if (sums.blocks.empty()) {
      sums.power.assign(setup.lines, 0.0);
      sums.second.assign(setup.filters.size() * setup.stretches, 0.0);
      sums.fourth = sums.second;
      sums.blocks.assign(setup.stretches, 0);
    }
    ++sums.blocks[stretch];
    const auto lines = workspace_->transform(block.channel(setup.channels[c]));
    for (std::size_t k = 0; k < setup.lines; ++k) sums.power[k] += std::norm(lines[setup.first_line + k]);
    for (std::size_t b = 0; b < setup.filters.size(); ++b) {
      const BandFilter& filter = setup.filters[b];
      const std::span<double> squared(workspace_->squared.data(), filter.samples());
      filter.squared_envelope(lines, workspace_->ffts.at(filter.samples()), squared);
      const std::size_t skipped = filter.samples() * setup.margin / block.frames;
      double second = 0.0, fourth = 0.0;
      for (std::size_t i = skipped; i + skipped < squared.size(); ++i) {
        second += squared[i];
        fourth += squared[i] * squared[i];
      }
      sums.second[b * setup.stretches + stretch] += second;
      sums.fourth[b * setup.stretches + stretch] += fourth;
    }
  }
}

void BandSearchConsumer::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<BandSearchConsumer&>(next);
  const auto add = [](auto& sum, const auto& more) {
    std::transform(sum.begin(), sum.end(), more.begin(), sum.begin(), std::plus<>());
  };
  for (std::size_t c = 0; c < sums_.size(); ++c) {
    Sums& mine = sums_[c];
    Sums& theirs = other.sums_[c];
    if (theirs.blocks.empty()) continue;
    if (mine.blocks.empty()) {
      mine = std::move(theirs);
      continue;
    }
    add(mine.power, theirs.power);
    add(mine.second, theirs.second);
    add(mine.fourth, theirs.fourth);
    add(mine.blocks, theirs.blocks);
  }
}

std::vector<BandSearch> BandSearchConsumer::searches() const {
  const Setup& setup = *setup_;
  std::vector<BandSearch> all;
  for (std::size_t c = 0; c < sums_.size(); ++c) {
    const Sums& sums = sums_[c];
    BandSearch search;
    search.channel = setup.recording.channels[setup.channels[c]].name;
    search.rate_hz = setup.recording.rate_hz;
    search.options = setup.options;
    search.stretch_s =
        static_cast<double>(setup.range.size()) / setup.recording.rate_hz / static_cast<double>(setup.stretches);
    // A stretch counts with half of the blocks that the fullest one has.
    const std::size_t full = sums.blocks.empty() ? 0 : *std::max_element(sums.blocks.begin(), sums.blocks.end());
    std::vector<std::size_t> used;
    std::size_t fewest = full;
    for (std::size_t s = 0; s < sums.blocks.size(); ++s) {
      if (sums.blocks[s] == 0 || 2 * sums.blocks[s] < full) continue;
      used.push_back(s);
      fewest = std::min(fewest, sums.blocks[s]);
    }
    search.stretches = used.size();
    const auto smooth = smoothed(sums.power);
    for (std::size_t b = 0; b < setup.filters.size() && !used.empty(); ++b) {
      const BandFilter& filter = setup.filters[b];
      const std::size_t inner = filter.samples() - 2 * (filter.samples() * setup.margin / plan().length());
      BandKurtosis band;
      band.band_hz = setup.bands_hz[b];
      std::vector<double> values;
      for (const std::size_t s : used) {
        const double n = static_cast<double>(sums.blocks[s] * inner);
        const double second = sums.second[b * setup.stretches + s];
        const double value = second > 0.0 ? n * sums.fourth[b * setup.stretches + s] / (second * second) - 2.0 : 0.0;
        if (values.empty() || value > band.strongest) {
          band.strongest = value;
          const double middle = (static_cast<double>(s) + 0.5) / static_cast<double>(setup.stretches);
          const auto frame =
              setup.range.begin + static_cast<std::int64_t>(middle * static_cast<double>(setup.range.size()));
          band.strongest_at_s = setup.recording.time_s(frame);
        }
        values.push_back(value);
      }
      const auto middle = values.begin() + static_cast<std::ptrdiff_t>((values.size() - 1) / 2);
      std::nth_element(values.begin(), middle, values.end());
      band.kurtosis = *middle;
      const auto density = std::span(smooth).subspan(filter.first_line() - setup.first_line, filter.gains().size());
      const double independent = static_cast<double>(fewest * inner) / samples_alike(density, filter);
      band.limit = kurtosis_limit(independent, used.size(),
                                  setup.options.false_chance / static_cast<double>(setup.filters.size()));
      search.bands.push_back(band);
    }
    const bool may_choose = used.size() >= least_stretches && search.stretch_s >= least_stretch_s;
    for (std::size_t b = 0; b < search.bands.size() && may_choose; ++b) {
      const BandKurtosis& band = search.bands[b];
      if (band.kurtosis <= band.limit) continue;
      if (!search.chosen || band.kurtosis > search.bands[*search.chosen].kurtosis) search.chosen = b;
    }
    all.push_back(std::move(search));
  }
  return all;
}

}  // namespace stillmass::spectral
