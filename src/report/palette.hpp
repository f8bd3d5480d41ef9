#pragma once

#include <cstddef>
#include <span>
#include <string>
#include <string_view>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// What a colour is for, and its value in the light scheme (also that of print) and in the dark one. The style sheet
/// gets them as custom properties, `--ROLE`; plotly_json names them "role:ROLE" or "role:ROLE/OPACITY".
///
/// The six series colours differ by at least 22 in CIELAB (CIE 1976) to normal eyes and to protanopes, deuteranopes and
/// tritanopes (simulated by Machado, Oliveira & Fernandes 2009, full severity), and have a contrast of at least 3:1
/// against their paper (WCAG 2.1, graphics).
struct Colour {
  std::string_view role;
  std::string_view light;
  std::string_view dark;
};

std::span<const Colour> palette();

/// Value in the light scheme. An unknown role is a fault of the program: `Error` of kind `internal`.
std::string_view light(std::string_view role);

inline constexpr std::size_t series_colours = 6;

/// "series-1" to "series-6", and round again.
std::string series_role(std::size_t index);
std::string_view role_of(Tone tone);
std::string_view role_of(MarkKind kind);

/// The palette as rules of a style sheet, for both schemes and print.
std::string palette_css();

}  // namespace stillmass::report
