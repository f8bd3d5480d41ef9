#include "recording/window_spans.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>

#include "stillmass/recording/sample_quality.hpp"

namespace stillmass::recording {

WindowSpans::WindowSpans(double rate_hz)
    : frames_(std::max<std::int64_t>(16, std::llround(quality_limit::quiet_seconds * rate_hz))) {}

void WindowSpans::take(std::span<const double> samples, std::int64_t first_frame) {
  while (!samples.empty()) {
    Window piece;
    piece.number = first_frame / frames_;
    piece.samples = std::min((piece.number + 1) * frames_ - first_frame, static_cast<std::int64_t>(samples.size()));
    for (const double sample : samples.first(static_cast<std::size_t>(piece.samples))) {
      piece.least = sample < piece.least ? sample : piece.least;
      piece.largest = sample > piece.largest ? sample : piece.largest;
    }
    add(piece);
    first_frame += piece.samples;
    samples = samples.subspan(static_cast<std::size_t>(piece.samples));
  }
}

// The first window of a part may be continued to the left, the last one to the right; one between them that lacks
// samples (missing ones, a gap) is left out.
void WindowSpans::add(const Window& piece) {
  Window* current = tail_ ? &*tail_ : head_ ? &*head_ : nullptr;
  if (current != nullptr && current->number == piece.number) {
    current->samples += piece.samples;
    current->least = std::min(current->least, piece.least);
    current->largest = std::max(current->largest, piece.largest);
  } else {
    (head_ ? tail_ : head_) = piece;
    current = tail_ ? &*tail_ : &*head_;
  }
  if (current->samples == frames_) sort_in(*current);
}

bool WindowSpans::quieter(const Window& a, const Window& b) {
  return a.span() != b.span() ? a.span() < b.span() : a.number < b.number;
}

bool WindowSpans::louder(const Window& a, const Window& b) {
  return a.span() != b.span() ? a.span() > b.span() : a.number < b.number;
}

void WindowSpans::sort_in(const Window& window) {
  ++windows_;
  const double span = window.span();
  const int bin = span > 0.0 ? static_cast<int>(std::floor(4.0 * std::log2(span))) + quarters / 2 : 0;
  ++spans_[static_cast<std::size_t>(std::clamp(bin, 0, quarters - 1))];
  const auto keep = [&](std::vector<Window>& all, auto before) {
    if (all.size() == kept && !before(window, all.back())) return;
    all.insert(std::upper_bound(all.begin(), all.end(), window, before), window);
    if (all.size() > kept) all.pop_back();
  };
  keep(quietest_, quieter);
  keep(loudest_, louder);
}

void WindowSpans::merge(const WindowSpans& later) {
  if (!later.head_) return;
  if (!head_) {
    *this = later;
    return;
  }
  const auto join = [](std::vector<Window>& all, const std::vector<Window>& more, auto before) {
    all.insert(all.end(), more.begin(), more.end());
    std::sort(all.begin(), all.end(), before);
    if (all.size() > kept) all.resize(kept);
  };
  join(quietest_, later.quietest_, quieter);
  join(loudest_, later.loudest_, louder);
  for (std::size_t bin = 0; bin < spans_.size(); ++bin) spans_[bin] += later.spans_[bin];
  windows_ += later.windows_;
  for (const auto& window : {later.head_, later.tail_}) {
    if (!window) continue;
    if (window->samples == frames_) {
      tail_ = window;  // sorted in already
    } else {
      add(*window);
    }
  }
}

double WindowSpans::span_quantile(double probability) const {
  std::int64_t below = 0;
  for (std::size_t bin = 0; bin < spans_.size(); ++bin) {
    below += spans_[bin];
    if (static_cast<double>(below) >= probability * static_cast<double>(windows_)) {
      return std::exp2(0.25 * (static_cast<double>(bin) + 0.5 - quarters / 2));
    }
  }
  return 0.0;
}

std::vector<FrameRange> WindowSpans::runs(std::vector<std::int64_t> numbers, std::size_t least,
                                          std::size_t most) const {
  std::sort(numbers.begin(), numbers.end());
  std::vector<FrameRange> found;
  for (std::size_t i = 0; i < numbers.size();) {
    std::size_t end = i + 1;
    while (end < numbers.size() && numbers[end] == numbers[end - 1] + 1) ++end;
    if (end - i >= least && end - i <= most) found.push_back({numbers[i] * frames_, (numbers[end - 1] + 1) * frames_});
    i = end;
  }
  return found;
}

std::vector<FrameRange> WindowSpans::gaps() const {
  if (windows_ < quality_limit::quiet_windows) return {};
  const double usual = span_quantile(0.5);
  if (span_quantile(0.25) < quality_limit::quiet_steady * usual) return {};
  std::vector<std::int64_t> quiet;
  for (const Window& window : quietest_) {
    if (window.span() < quality_limit::quiet_share * usual) quiet.push_back(window.number);
  }
  return runs(std::move(quiet), 2, kept);
}

std::vector<FrameRange> WindowSpans::bursts() const {
  if (windows_ < quality_limit::quiet_windows) return {};
  const double usual = span_quantile(0.5);
  const double high = span_quantile(0.9);
  if (span_quantile(0.25) < quality_limit::quiet_steady * usual || high > quality_limit::burst_steady * usual)
    return {};
  std::vector<std::int64_t> loud;
  for (const Window& window : loudest_) {
    if (window.span() > quality_limit::burst_ratio * high) loud.push_back(window.number);
  }
  if (loud.size() == kept) return {};  // so many are no exception
  return runs(std::move(loud), 1, 2);
}

}  // namespace stillmass::recording
