#include <array>
#include <cmath>
#include <string>

#include "report/palette.hpp"
#include "support/catch.hpp"

using namespace stillmass::report;

namespace {

using Triple = std::array<double, 3>;
using Matrix = std::array<Triple, 3>;

/// Linear red, green, blue of "#rrggbb" (sRGB, IEC 61966-2-1).
Triple linear(std::string_view hex) {
  Triple rgb{};
  for (std::size_t i = 0; i < 3; ++i) {
    const double c = std::stoi(std::string(hex.substr(1 + 2 * i, 2)), nullptr, 16) / 255.0;
    rgb[i] = c <= 0.04045 ? c / 12.92 : std::pow((c + 0.055) / 1.055, 2.4);
  }
  return rgb;
}

double luminance(const Triple& rgb) { return 0.2126 * rgb[0] + 0.7152 * rgb[1] + 0.0722 * rgb[2]; }

/// WCAG 2.1, contrast ratio.
double contrast(std::string_view a, std::string_view b) {
  const double la = luminance(linear(a)), lb = luminance(linear(b));
  return (std::max(la, lb) + 0.05) / (std::min(la, lb) + 0.05);
}

Triple seen(const Triple& rgb, const Matrix& eye) {
  Triple out{};
  for (std::size_t i = 0; i < 3; ++i) {
    for (std::size_t k = 0; k < 3; ++k) out[i] += eye[i][k] * rgb[k];
    out[i] = std::min(1.0, std::max(0.0, out[i]));
  }
  return out;
}

/// CIELAB (CIE 1976), white D65.
Triple lab(const Triple& c) {
  const auto f = [](double t) { return t > 0.008856 ? std::cbrt(t) : 7.787 * t + 16.0 / 116.0; };
  const double x = f((0.4124 * c[0] + 0.3576 * c[1] + 0.1805 * c[2]) / 0.9505);
  const double y = f(luminance(c));
  const double z = f((0.0193 * c[0] + 0.1192 * c[1] + 0.9505 * c[2]) / 1.089);
  return {116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)};
}

// Normal vision, then protanopia, deuteranopia, tritanopia at full severity: Machado, Oliveira & Fernandes, IEEE Trans.
// Visualization and Computer Graphics 15(6), 2009, the authors' table of matrices (from memory).
const std::array<Matrix, 4> eyes{
    {{{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}},
     {{{0.152286, 1.052583, -0.204868}, {0.114503, 0.786281, 0.099216}, {-0.003882, -0.048116, 1.051998}}},
     {{{0.367322, 0.860646, -0.227968}, {0.280085, 0.672501, 0.047413}, {-0.011820, 0.042940, 0.968881}}},
     {{{1.255528, -0.076749, -0.178779}, {-0.078411, 0.930809, 0.147602}, {0.004733, 0.691367, 0.303900}}}}};

std::string_view value(std::string_view role, bool dark) {
  for (const Colour& colour : palette()) {
    if (colour.role == role) return dark ? colour.dark : colour.light;
  }
  return {};
}

}  // namespace

TEST_CASE("every two series colours differ to normal and to colour-blind eyes, in both schemes") {
  for (const bool dark : {false, true}) {
    for (const Matrix& eye : eyes) {
      for (std::size_t i = 0; i < series_colours; ++i) {
        for (std::size_t j = 0; j < i; ++j) {
          const Triple a = lab(seen(linear(value(series_role(i), dark)), eye));
          const Triple b = lab(seen(linear(value(series_role(j), dark)), eye));
          INFO(series_role(i) << " and " << series_role(j) << (dark ? ", dark" : ", light"));
          CHECK(std::hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]) >= 22.0);
        }
      }
    }
  }
}

TEST_CASE("text has a contrast of 4.5 and curves of 3 against their paper (WCAG 2.1)") {
  for (const bool dark : {false, true}) {
    const std::string_view paper = value("paper", dark);
    for (const char* role : {"ink", "muted", "good", "caution", "bad"})
      CHECK(contrast(value(role, dark), paper) >= 4.5);
    for (std::size_t i = 0; i < series_colours; ++i) CHECK(contrast(value(series_role(i), dark), paper) >= 3.0);
  }
}
