#pragma once

#include <array>
#include <cstdint>
#include <limits>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/recording/recording.hpp"

namespace stillmass::recording {

/// The peak-to-peak values of a signal over short windows, of which the quietest and the loudest are kept: in a signal
/// that is steady otherwise a loose contact leaves windows of next to nothing, interference leaves single loud ones.
/// Windows stand on a fixed grid of frames, so parts that follow each other can be merged wherever they are cut.
class WindowSpans {
 public:
  explicit WindowSpans(double rate_hz);

  /// Consecutive valid samples.
  void take(std::span<const double> samples, std::int64_t first_frame);
  void merge(const WindowSpans& later);

  /// Stretches of two or more windows with next to no signal, in order; empty where the signal is not steady enough
  /// from window to window for this to mean anything.
  std::vector<FrameRange> gaps() const;

  /// Single windows (or two, where one lies on the border) far louder than all others; empty as above.
  std::vector<FrameRange> bursts() const;

 private:
  struct Window {
    std::int64_t number = 0;
    std::int64_t samples = 0;
    double least = std::numeric_limits<double>::infinity();
    double largest = -std::numeric_limits<double>::infinity();
    double span() const { return largest - least; }
  };
  static constexpr std::size_t kept = 256;
  static constexpr int quarters = 512;  // bins of the spans: four to an octave, 2^-64 to 2^64

  static bool quieter(const Window& a, const Window& b);
  static bool louder(const Window& a, const Window& b);
  std::vector<FrameRange> runs(std::vector<std::int64_t> numbers, std::size_t least, std::size_t most) const;
  void add(const Window& piece);
  void sort_in(const Window& window);
  double span_quantile(double probability) const;

  std::int64_t frames_;  // of a window
  std::optional<Window> head_;
  std::optional<Window> tail_;
  std::vector<Window> quietest_;  // by span, then by number
  std::vector<Window> loudest_;
  std::array<std::int64_t, quarters> spans_{};
  std::int64_t windows_ = 0;
};

}  // namespace stillmass::recording
