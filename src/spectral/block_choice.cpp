#include "stillmass/spectral/block_choice.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/averages.hpp"
#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

struct Named {
  BlockReason reason;
  std::string_view name;
};
constexpr std::array reasons{Named{BlockReason::frames_asked, "frames-asked"},
                             Named{BlockReason::resolution_asked, "resolution-asked"},
                             Named{BlockReason::lines_asked, "lines-asked"},
                             Named{BlockReason::usual, "usual"},
                             Named{BlockReason::usual_separates, "usual-separates"},
                             Named{BlockReason::separation, "separation"},
                             Named{BlockReason::averages, "averages"},
                             Named{BlockReason::memory, "memory"}};

/// Spacing that gives so many lines up to a frequency.
double spacing_of_lines(const Recording& recording, const SpectrumOptions& options) {
  const double top = options.lines_to_hz == 0.0 ? 0.5 * recording.rate_hz : options.lines_to_hz;
  if (!(top > 0.0 && top <= 0.5 * recording.rate_hz * (1.0 + 1e-12))) {
    throw base::usage_error(recording.file.string(), fmt::format("lines up to {} Hz", top),
                            fmt::format("the spectrum reaches {:.6g} Hz", 0.5 * recording.rate_hz));
  }
  return top / static_cast<double>(options.lines);
}

/// Distance of frequencies to be told apart: as said, or half the running speed.
std::optional<double> distance_of(const Recording& recording, const SpectrumOptions& options) {
  const auto checked = [&](double value, const char* what) {
    if (!(value > 0.0 && std::isfinite(value))) {
      throw base::usage_error(recording.file.string(), fmt::format("{} of {} Hz", what, value),
                              "give a number greater than 0");
    }
    return value;
  };
  if (options.separate_hz) return checked(*options.separate_hz, "a distance of frequencies");
  if (options.speed_hz) return 0.5 * checked(*options.speed_hz, "a speed");
  return std::nullopt;
}

/// Makes blocks longer than the usual ones until the frequencies are told apart, as far as averages and memory allow.
void refine(BlockChoice& choice, const Recording& recording, FrameRange range, double overlap) {
  choice.reason = BlockReason::usual_separates;
  if (recording.rate_hz / static_cast<double>(choice.length) <= *choice.needed_line_hz) return;
  const auto channels = static_cast<double>(std::max<std::size_t>(1, recording.channels.size()));
  const double held = held_samples / channels;
  const double needed = std::ceil(recording.rate_hz / *choice.needed_line_hz - 1e-9);
  const double longest = std::min(needed, static_cast<double>(range.size()));
  choice.reason = BlockReason::separation;
  std::size_t length = fast_length_at_least(static_cast<std::size_t>(longest));
  if (static_cast<double>(length) > std::max(held, static_cast<double>(choice.length))) {
    choice.reason = BlockReason::memory;
    length = fast_length_at_most(static_cast<std::size_t>(std::min(longest, held)));
  }
  const auto too_few = [&] { return count_blocks(recording, range, length, overlap) < least_blocks; };
  if (too_few() || needed > longest) choice.reason = BlockReason::averages;
  while (length > choice.length && too_few()) length = fast_length_at_most(length - 1);
  choice.length = std::max(choice.length, length);
}

}  // namespace

std::string_view name(BlockReason reason) {
  return std::find_if(reasons.begin(), reasons.end(), [=](const Named& n) { return n.reason == reason; })->name;
}

double separating_line_hz(Window window, double distance_hz) {
  return distance_hz / std::max(lobe_bins(window) + 1.0, 3.0);
}

std::string BlockChoice::text() const {
  const double told_apart = separate_hz.value_or(0.0);
  const double needed = needed_line_hz.value_or(0.0);
  switch (reason) {
    case BlockReason::frames_asked:
      return fmt::format("blocks of {} samples, as asked", length);
    case BlockReason::resolution_asked:
      return "as fine as asked";
    case BlockReason::lines_asked:
      return "as many lines as asked";
    case BlockReason::usual:
      return averages > least_blocks ? fmt::format("usual lines, {} averages", averages)
                                     : fmt::format("as fine as {} averages allow", averages);
    case BlockReason::usual_separates:
      return fmt::format("fine enough to tell apart frequencies {:.3g} Hz from one another, with {} averages",
                         told_apart, averages);
    case BlockReason::separation:
      return fmt::format("made so fine to tell apart frequencies {:.3g} Hz from one another", told_apart);
    case BlockReason::averages:
      return fmt::format(
          "as fine as {} averages allow; to tell apart frequencies {:.3g} Hz from one another takes "
          "lines {:.2g} Hz apart: record {:.3g} s",
          averages, told_apart, needed, needed_duration_s.value_or(0.0));
    case BlockReason::memory:
      return fmt::format(
          "as fine as the memory for all channels allows; to tell apart frequencies {:.3g} Hz from one "
          "another takes lines {:.2g} Hz apart: ask for that resolution",
          told_apart, needed);
  }
  return {};
}

BlockChoice choose_block(const Recording& recording, FrameRange range, const SpectrumOptions& options) {
  BlockChoice choice;
  choice.separate_hz = distance_of(recording, options);
  if (choice.separate_hz) choice.needed_line_hz = separating_line_hz(options.window, *choice.separate_hz);
  if (options.block_frames != 0) {
    choice.length = options.block_frames;
    choice.reason = BlockReason::frames_asked;
  } else if (options.lines != 0) {
    choice.length = block_length(recording, range, spacing_of_lines(recording, options), options.overlap);
    choice.reason = BlockReason::lines_asked;
  } else {
    choice.length = block_length(recording, range, options.resolution_hz, options.overlap);
    choice.reason = options.resolution_hz != 0.0 ? BlockReason::resolution_asked : BlockReason::usual;
    if (choice.reason == BlockReason::usual && choice.needed_line_hz) refine(choice, recording, range, options.overlap);
  }
  choice.line_hz = recording.rate_hz / static_cast<double>(choice.length);
  const BlockPlan plan = BlockPlan::overlapping(recording, range, choice.length, options.overlap);
  choice.averages = plan.blocks();
  choice.effective_averages = averages(options.window, choice.length, plan.runs()).effective;
  if (choice.reason == BlockReason::averages) {
    const auto hops = static_cast<double>(least_blocks - 1) * (1.0 - options.overlap);
    choice.needed_duration_s = (1.0 + hops) / *choice.needed_line_hz;
  }
  return choice;
}

}  // namespace stillmass::spectral
