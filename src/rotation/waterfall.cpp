#include "stillmass/rotation/waterfall.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::rotation {
namespace {

using recording::FrameRange;

constexpr std::size_t rows_at_once = 4;

// How the recording is cut into rows, and the spectrum's lines into groups of which the highest is kept.
struct Grid {
  FrameRange range;
  std::size_t rows = 1;
  std::size_t block_frames = 0;
  double line_hz = 0.0;
  std::size_t kept_lines = 0;
  std::size_t group = 1;

  FrameRange row(std::size_t i) const {
    const auto cut = [&](std::size_t k) {
      return range.begin + range.size() * static_cast<std::int64_t>(k) / static_cast<std::int64_t>(rows);
    };
    return {cut(i), cut(i + 1)};
  }
  std::size_t lines() const { return (kept_lines + group - 1) / group; }

  std::vector<double> frequencies() const {
    std::vector<double> out;
    for (std::size_t g = 0; g < lines(); ++g) {
      const std::size_t last = std::min(kept_lines, (g + 1) * group) - 1;
      out.push_back(0.5 * static_cast<double>(g * group + last) * line_hz);
    }
    return out;
  }
  std::vector<double> held(const spectral::Spectrum& spectrum) const {
    if (spectrum.blocks == 0) return {};
    std::vector<double> out(lines(), 0.0);
    for (std::size_t k = 0; k < kept_lines; ++k) {
      out[k / group] = std::max(out[k / group], spectrum.amplitude_rms(k));
    }
    return out;
  }
};

Grid grid_of(const recording::Recording& recording, FrameRange range, const WaterfallOptions& options) {
  if (options.max_rows < 1 || options.max_lines < 1) throw base::usage_error("waterfall", "needs rows and lines");
  const double duration = static_cast<double>(range.size()) / recording.rate_hz;
  const double resolution = options.resolution_hz > 0.0
                                ? options.resolution_hz
                                : std::clamp(1.5 * static_cast<double>(options.max_rows) / duration, 0.25, 5.0);
  const double block = recording.rate_hz / resolution;
  if (!(block >= 2.0) || block > static_cast<double>(range.size())) {
    throw base::usage_error("waterfall", fmt::format("lines {:.3g} Hz apart do not fit {:.3g} s", resolution, duration),
                            "ask for a coarser resolution or record longer");
  }
  Grid grid;
  grid.range = range;
  grid.block_frames = spectral::fast_length_at_most(static_cast<std::size_t>(block));
  grid.rows = std::min(options.max_rows, static_cast<std::size_t>(range.size()) / grid.block_frames);
  grid.line_hz = recording.rate_hz / static_cast<double>(grid.block_frames);
  grid.kept_lines = grid.block_frames / 2 + 1;
  if (options.max_frequency_hz) {
    grid.kept_lines = std::min(grid.kept_lines, static_cast<std::size_t>(*options.max_frequency_hz / grid.line_hz) + 1);
  }
  grid.group = (grid.kept_lines + options.max_lines - 1) / options.max_lines;
  return grid;
}

std::vector<std::size_t> chosen_channels(const recording::Recording& recording, const WaterfallOptions& options) {
  std::vector<std::size_t> out;
  for (std::size_t c = 0; options.channels.empty() && c < recording.channels.size(); ++c) {
    if (recording.channels[c].role == recording::Role::vibration) out.push_back(c);
  }
  for (const std::size_t c : options.channels) {
    if (c >= recording.channels.size()) {
      throw base::usage_error("waterfall", fmt::format("there is no channel {}", c + 1));
    }
    out.push_back(c);
  }
  return out;
}

}  // namespace

std::vector<Waterfall> waterfalls(const recording::Reader& reader, FrameRange range, const SpeedCurve* curve,
                                  const WaterfallOptions& options, const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  const std::vector<std::size_t> channels = chosen_channels(recording, options);
  const Grid grid = grid_of(recording, range, options);

  std::vector<Waterfall> out;
  for (const std::size_t c : channels) {
    Waterfall& waterfall = out.emplace_back();
    waterfall.channel = recording.channels[c].name;
    waterfall.quantity = recording.channels[c].unit.quantity;
    waterfall.lines_hz = grid.frequencies();
    waterfall.resolution_hz = grid.line_hz;
  }

  spectral::SpectrumOptions one_row;
  one_row.window = options.window;
  one_row.averaging = spectral::Averaging::peak_hold;
  one_row.block_frames = grid.block_frames;
  base::Context alone;  // the rows are spread over the threads, not the blocks within a row
  alone.stop = context.stop;
  const auto amplitudes = [&](std::size_t row) {
    const auto spectra = spectral::averaged_spectra(reader, grid.row(row), one_row, alone);
    std::vector<std::vector<double>> held;
    for (const std::size_t c : channels) held.push_back(grid.held(spectra[c]));
    return held;
  };

  std::size_t row = 0;
  base::for_ranges(
      context, grid.rows, rows_at_once,
      [&](std::size_t begin, std::size_t end) {
        std::vector<std::vector<std::vector<double>>> part;
        for (std::size_t i = begin; i < end; ++i) part.push_back(amplitudes(i));
        return part;
      },
      [&](std::vector<std::vector<std::vector<double>>> part) {
        for (auto& held : part) {
          const FrameRange frames = grid.row(row++);
          const double time = recording.time_s(frames.begin + frames.size() / 2);
          std::optional<double> speed;
          if (curve != nullptr && curve->time_s().contains(time)) speed = curve->speed_at(time);
          for (std::size_t c = 0; c < out.size(); ++c) out[c].rows.push_back({time, speed, std::move(held[c])});
        }
        context.report("spectra against time", static_cast<double>(row) / static_cast<double>(grid.rows));
      });
  return out;
}

}  // namespace stillmass::rotation
