#include "report/palette.hpp"

#include <algorithm>
#include <array>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::report {

namespace {

constexpr std::array colours{
    Colour{"ink", "#16202a", "#e8edf1"},      Colour{"muted", "#4a5762", "#a9b5bf"},
    Colour{"frame", "#8b98a3", "#5f6c77"},    Colour{"grid", "#dde3e8", "#2c353d"},
    Colour{"paper", "#ffffff", "#14191d"},    Colour{"quiet", "#9aa5ae", "#6b7781"},
    Colour{"good", "#1d7a46", "#63c28d"},     Colour{"caution", "#8f5600", "#f0b04a"},
    Colour{"bad", "#b3261e", "#ff8a7a"},      Colour{"heat", "#0c2f57", "#d8ecff"},
    Colour{"series-1", "#0060c3", "#579de3"}, Colour{"series-2", "#9b3900", "#ea934c"},
    Colour{"series-3", "#2c9d8d", "#75e2bf"}, Colour{"series-4", "#853988", "#e9c4ff"},
    Colour{"series-5", "#a98908", "#eec937"}, Colour{"series-6", "#4b5359", "#90a2b2"},
};

std::string properties(std::string_view Colour::*scheme) {
  std::string text;
  for (const Colour& colour : colours) text += fmt::format("--{}:{};", colour.role, colour.*scheme);
  return text;
}

}  // namespace

std::span<const Colour> palette() { return colours; }

std::string_view light(std::string_view role) {
  const auto found = std::find_if(colours.begin(), colours.end(), [&](const Colour& c) { return c.role == role; });
  if (found == colours.end()) {
    throw base::Error(base::ErrorKind::internal, "", fmt::format("there is no colour for \"{}\"", role));
  }
  return found->light;
}

std::string series_role(std::size_t index) { return fmt::format("series-{}", index % series_colours + 1); }

std::string_view role_of(Tone tone) {
  switch (tone) {
    case Tone::good:
      return "good";
    case Tone::caution:
      return "caution";
    case Tone::bad:
      return "bad";
    case Tone::neutral:
      break;
  }
  return "muted";
}

std::string_view role_of(MarkKind kind) {
  switch (kind) {
    case MarkKind::natural_frequency:
      return "ink";
    case MarkKind::forcing_frequency:
      return "muted";
    case MarkKind::limit:
      return "bad";
    case MarkKind::plain:
      break;
  }
  return "frame";
}

std::string palette_css() {
  const std::string light_scheme = properties(&Colour::light);
  std::string classes;
  for (const Colour& colour : colours) {
    classes += fmt::format(".l-{0}{{stroke:var(--{0})}}.f-{0}{{fill:var(--{0})}}\n", colour.role);
  }
  return fmt::format(
             ":root{{color-scheme:light dark;{}}}\n@media (prefers-color-scheme:dark){{:root{{{}}}}}\n"
             "@media print{{:root{{color-scheme:light;{}}}}}\n",
             light_scheme, properties(&Colour::dark), light_scheme) +
         classes;
}

}  // namespace stillmass::report
