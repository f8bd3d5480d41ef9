#include "recording/flat_top.hpp"

#include <algorithm>

namespace stillmass::recording {

FlatTop FlatTop::of(std::span<const double> samples, double sign, double greatest) {
  FlatTop top;
  top.value = greatest;
  top.count = std::ssize(samples);
  std::int64_t run = 0;
  for (std::int64_t i = 0; i < top.count; ++i) {
    run = sign * samples[static_cast<std::size_t>(i)] == greatest ? run + 1 : 0;
    top.longest = std::max(top.longest, run);
    if (run == i + 1) top.head = run;
  }
  top.tail = run;
  return top;
}

void FlatTop::append(const FlatTop& later, bool adjacent) {
  if (later.count == 0) return;
  if (count == 0) {
    *this = later;
    return;
  }
  if (later.value > value) {
    const std::int64_t before = count;
    *this = later;
    head = 0;
    count += before;
    return;
  }
  if (later.value == value) {
    const bool is_one_run = head == count;
    const bool goes_on = later.tail == later.count;
    const std::int64_t joined = adjacent ? tail + later.head : 0;
    longest = std::max({longest, later.longest, joined});
    if (is_one_run && adjacent) head += later.head;
    tail = later.tail + (goes_on && adjacent ? tail : 0);
  } else {
    tail = 0;
  }
  count += later.count;
}

}  // namespace stillmass::recording
