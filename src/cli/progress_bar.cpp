#include "cli/progress_bar.hpp"

#include <algorithm>

#include <fmt/format.h>
#include <unistd.h>

#include "stillmass/base/text.hpp"

namespace stillmass::cli {

ProgressBar::ProgressBar(bool wanted) : on_(wanted && isatty(STDERR_FILENO) == 1) {}

void ProgressBar::show(std::string_view what, double fraction) {
  if (!on_) return;
  constexpr int cells = 24;
  const int full = std::clamp(static_cast<int>(fraction * cells), 0, cells);
  const std::string line = fmt::format("[{}{}] {:3.0f} %  {:.50}", std::string(static_cast<std::size_t>(full), '='),
                                       std::string(static_cast<std::size_t>(cells - full), ' '),
                                       std::clamp(fraction, 0.0, 1.0) * 100.0, base::printable(what));
  if (line == drawn_) return;
  drawn_ = line;
  std::fprintf(stderr, "\r\x1b[K%s", line.c_str());
  std::fflush(stderr);
}

void ProgressBar::clear() {
  if (!on_ || drawn_.empty()) return;
  std::fputs("\r\x1b[K", stderr);
  std::fflush(stderr);
  drawn_.clear();
}

}  // namespace stillmass::cli
