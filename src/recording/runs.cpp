#include "recording/runs.hpp"

#include <algorithm>

#include "stillmass/recording/sample_quality.hpp"

#include "recording/strip.hpp"

namespace stillmass::recording {

void RunList::add(const Run& run) {
  if (first.size() < kept) first.push_back(run);
  ++runs;
  samples += run.length();
  longest = std::max(longest, run.length());
  end = std::max(end, run.end);
}

void RunList::append(const RunList& later) {
  const std::size_t room = std::min(kept - first.size(), later.first.size());
  first.insert(first.end(), later.first.begin(), later.first.begin() + static_cast<std::ptrdiff_t>(room));
  runs += later.runs;
  samples += later.samples;
  longest = std::max(longest, later.longest);
  end = std::max(end, later.end);
}

void FlatTops::add(const Run& run) {
  const double height = sign * run.value;
  if (height < value) return;
  if (height > value) list = {};
  value = height;
  list.add(run);
}

void FlatTops::append(const FlatTops& later) {
  if (later.value > value) {
    *this = later;
  } else if (later.value == value) {
    list.append(later.list);
  }
}

RunChain::RunChain(double zero, std::int64_t flat_run) : zero_(zero), flat_run_(flat_run) { bottoms_.sign = -1.0; }

void RunChain::take(std::span<const double> samples, std::int64_t first_frame, std::size_t segment) {
  const auto count = static_cast<std::int64_t>(samples.size());
  const double* const x = samples.data();
  std::int64_t begin = 0;
  const auto found = [&](std::int64_t end) {
    Run run{first_frame + begin, first_frame + end, segment, x[begin]};
    if (begin > 0) run.before = x[begin - 1];
    if (end < count) run.after = x[end];
    push(run);
  };
  std::int64_t looked_at = 0;  // up to there the strips hold equal neighbours
  for (std::int64_t i = 1; i < count; ++i) {
    // Within a strip of changing samples, behind a change, no run is longer than one.
    if (begin == i - 1 && begin > 0 && i >= looked_at && i + std::int64_t{strip} <= count) {
      if (any_in_strip(x + i, [](const double* at) { return at[0] == at[-1]; })) {
        looked_at = i + std::int64_t{strip};
      } else {
        i += std::int64_t{strip} - 1;
        begin = i;
        continue;
      }
    }
    if (x[i] == x[i - 1]) continue;
    // The first run of the piece may go on from the piece before; others matter only if they are long.
    if (begin == 0 || i - begin >= quality_limit::clipped_run) found(i);
    begin = i;
  }
  found(count);
}

void RunChain::push(Run run) {
  if (last_) {
    const bool adjacent = last_->end == run.begin && last_->segment == run.segment;
    if (adjacent && last_->value == run.value) {
      last_->end = run.end;
      last_->after = run.after;
      return;
    }
    if (adjacent) {
      last_->after = run.value;
      run.before = last_->value;
    }
    close_last();
  } else {
    last_is_first_ = true;
  }
  last_ = run;
}

void RunChain::close_last() {
  if (last_is_first_) {
    first_ = last_;
    last_is_first_ = false;
  } else {
    sort_in(*last_);
  }
}

void RunChain::sort_in(const Run& run) {
  if (run.length() < quality_limit::clipped_run) return;
  tops_.add(run);
  bottoms_.add(run);
  if (run.value == zero_ && run.length() >= quality_limit::dropout_run) zeros_.add(run);
  if (run.length() >= flat_run_) flats_.add(run);
}

void RunChain::append_sorted(const RunChain& later) {
  tops_.append(later.tops_);
  bottoms_.append(later.bottoms_);
  zeros_.append(later.zeros_);
  flats_.append(later.flats_);
}

void RunChain::append(const RunChain& later) {
  if (!later.last_) return;
  if (!last_) {
    *this = later;
    return;
  }
  if (!later.first_) {
    push(*later.last_);
    return;
  }
  push(*later.first_);
  close_last();
  append_sorted(later);
  last_ = later.last_;
}

void RunChain::close() {
  if (!last_) return;
  RunChain whole(zero_, flat_run_);
  if (first_) whole.sort_in(*first_);
  whole.append_sorted(*this);
  whole.sort_in(*last_);
  *this = whole;
}

}  // namespace stillmass::recording
