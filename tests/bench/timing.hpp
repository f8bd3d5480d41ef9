#pragma once

#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <thread>
#include <vector>

namespace bench {

/// Prints how long a kernel took by the clock and on all processors, start of the process and imports left out;
/// scripts/bench reads the line.
template <class Work>
void timed(Work work) {
  const auto before = std::chrono::steady_clock::now();
  const std::clock_t used = std::clock();
  work();
  const double processors_s = static_cast<double>(std::clock() - used) / CLOCKS_PER_SEC;
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - before;
  std::printf("kernel_s %.9f %.9f\n", took.count(), processors_s);
}

/// A limit is measured on so many threads as the program uses by default.
inline unsigned all_threads() {
  const unsigned found = std::thread::hardware_concurrency();
  return found == 0 ? 1 : found;
}

/// work(t) on each of `count` threads.
template <class Work>
void on_threads(unsigned count, Work work) {
  std::vector<std::jthread> pool;
  for (unsigned t = 0; t < count; ++t) pool.emplace_back([&work, t] { work(t); });
}

[[noreturn]] inline void fail(const char* what) {
  std::fprintf(stderr, "%s\n", what);
  std::exit(1);
}

}  // namespace bench
