#pragma once

#include <cstdio>
#include <string>
#include <string_view>

namespace stillmass::cli {

/// One line on standard error that shows how far the work is. Draws nothing where standard error is not a terminal.
class ProgressBar {
 public:
  explicit ProgressBar(bool wanted);
  ~ProgressBar() { clear(); }
  ProgressBar(const ProgressBar&) = delete;
  ProgressBar& operator=(const ProgressBar&) = delete;

  void show(std::string_view what, double fraction);
  void clear();

 private:
  bool on_ = false;
  std::string drawn_;
};

}  // namespace stillmass::cli
