#pragma once

#include <functional>
#include <stop_token>
#include <string_view>

namespace stillmass::base {

/// What every long function is given: where to report progress, how it learns that it should stop, how many threads it
/// may use. Copies are cheap; the default works silently on one thread.
struct Context {
  /// Called with what is being done and the fraction done (0 to 1); never from two threads at once.
  std::function<void(std::string_view what, double fraction)> progress;
  std::stop_token stop;
  unsigned threads = 1;

  void report(std::string_view what, double fraction) const {
    if (progress) progress(what, fraction);
  }
  /// Throws `Stopped` if a stop was asked for.
  void check_stop() const;
};

}  // namespace stillmass::base
