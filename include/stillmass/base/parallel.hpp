#pragma once

#include <condition_variable>
#include <cstddef>
#include <exception>
#include <map>
#include <mutex>
#include <optional>
#include <thread>
#include <utility>
#include <vector>

#include "stillmass/base/context.hpp"

namespace stillmass::base {

/// Runs `work(begin, end)` for [0, count) cut into ranges of `grain` items (the last may be shorter) and hands each
/// partial result to `merge(partial)` on the calling thread, in the order of the ranges. The cut depends on `count` and
/// `grain` only, so 1 and N threads give the same bits. At most `threads + 1` partial results are held at a time.
/// The first exception (of the lowest range) is thrown again here once all threads have ended. Not to be nested.
template <class Work, class Merge>
void for_ranges(const Context& context, std::size_t count, std::size_t grain, Work work, Merge merge) {
  using Partial = decltype(work(std::size_t{}, std::size_t{}));
  if (grain == 0) grain = 1;
  const std::size_t ranges = (count + grain - 1) / grain;
  const auto run = [&](std::size_t i) { return work(i * grain, (i + 1) * grain < count ? (i + 1) * grain : count); };

  if (context.threads <= 1 || ranges <= 1) {
    for (std::size_t i = 0; i < ranges; ++i) {
      context.check_stop();
      merge(run(i));
    }
    return;
  }

  std::mutex mutex;
  std::condition_variable changed;
  std::map<std::size_t, Partial> waiting;
  std::map<std::size_t, std::exception_ptr> failed;
  std::size_t next_range = 0;
  std::size_t next_merge = 0;
  bool over = false;
  const std::size_t threads = context.threads < ranges ? context.threads : ranges;

  const auto worker = [&] {
    std::unique_lock lock(mutex);
    while (true) {
      changed.wait(lock, [&] { return over || next_range >= ranges || next_range < next_merge + threads + 1; });
      if (over || next_range >= ranges) return;
      const std::size_t i = next_range++;
      lock.unlock();
      std::optional<Partial> partial;
      std::exception_ptr fault;
      try {
        context.check_stop();
        partial.emplace(run(i));
      } catch (...) {
        fault = std::current_exception();
      }
      lock.lock();
      if (fault) {
        failed.emplace(i, fault);
      } else {
        waiting.emplace(i, std::move(*partial));
      }
      changed.notify_all();
    }
  };

  std::exception_ptr fault;
  {
    std::vector<std::jthread> pool;
    for (std::size_t t = 0; t < threads; ++t) pool.emplace_back(worker);
    std::unique_lock lock(mutex);
    while (next_merge < ranges && !fault) {
      changed.wait(lock, [&] { return waiting.contains(next_merge) || failed.contains(next_merge); });
      if (const auto bad = failed.find(next_merge); bad != failed.end()) {
        fault = bad->second;
        break;
      }
      auto node = waiting.extract(next_merge);
      lock.unlock();
      try {
        merge(std::move(node.mapped()));
      } catch (...) {
        fault = std::current_exception();
      }
      lock.lock();
      ++next_merge;
      changed.notify_all();
    }
    over = true;
    changed.notify_all();
  }
  if (fault) std::rethrow_exception(fault);
}

}  // namespace stillmass::base
