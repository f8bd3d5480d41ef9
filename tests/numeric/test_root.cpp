#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/root.hpp"

#include "support/catch.hpp"

namespace numeric = stillmass::numeric;

TEST_CASE("a bracketed root is found to the tolerance asked for") {
  // Closed forms: cos x = 0 at pi/2; exp(x) = 2 at ln 2; a triple root at 1 that secants alone approach slowly.
  CHECK(numeric::bracketed_root([](double x) { return std::cos(x); }, {0.0, 3.0}, 1e-13) ==
        Approx(std::acos(0.0)).epsilon(1e-12));
  CHECK(numeric::bracketed_root([](double x) { return std::exp(x) - 2.0; }, {-5.0, 5.0}, 1e-13) ==
        Approx(std::log(2.0)).epsilon(1e-12));
  CHECK(std::abs(numeric::bracketed_root([](double x) { return std::pow(x - 1.0, 3); }, {-1.0, 4.0}, 1e-6) - 1.0) <
        1e-5);
  CHECK(numeric::bracketed_root([](double x) { return x; }, {0.0, 1.0}, 1e-12) == 0.0);
}

TEST_CASE("a bracketed root takes few calls on a smooth function") {
  int calls = 0;
  numeric::bracketed_root(
      [&](double x) {
        ++calls;
        return x * x * x - 2.0 * x - 5.0;  // Wallis's cubic, root 2.0945514815423265
      },
      {2.0, 3.0}, 1e-12);
  CHECK(calls <= 12);
}

TEST_CASE("a bracket without a change of sign is an error") {
  CHECK_THROWS_AS(numeric::bracketed_root([](double) { return 1.0; }, {0.0, 1.0}, 1e-9), stillmass::base::Error);
  CHECK_THROWS_AS(numeric::bracketed_root([](double) { return std::nan(""); }, {0.0, 1.0}, 1e-9),
                  stillmass::base::Error);
}

TEST_CASE("a minimum is found inside, at a kink and at either end") {
  const auto parabola = numeric::minimum([](double x) { return (x - 0.3) * (x - 0.3) + 2.0; }, {-1.0, 2.0}, 1e-8);
  CHECK(parabola.at == Approx(0.3).margin(1e-7));
  CHECK(parabola.value == Approx(2.0).epsilon(1e-14));
  CHECK(numeric::minimum([](double x) { return std::abs(x - 0.7); }, {0.0, 1.0}, 1e-9).at == Approx(0.7).margin(1e-7));
  CHECK(numeric::minimum([](double x) { return x; }, {2.0, 5.0}, 1e-6).at == 2.0);
  CHECK(numeric::minimum([](double x) { return -x; }, {2.0, 5.0}, 1e-6).at == 5.0);
}

TEST_CASE("the least maximum of two peaks is where they are equal and their common height is stationary") {
  // Heights x + (y - 1)^2 and 2 - x + (y - 2)^2 are equal on 2x = 2 + (y-2)^2 - (y-1)^2; the common height
  // 1 + ((y-1)^2 + (y-2)^2)/2 is least at y = 1.5: x = 1, height 1.25.
  const auto peaks = [](double x, double y) -> std::optional<numeric::PeakPair> {
    return numeric::PeakPair{
        x + (y - 1.0) * (y - 1.0), 2.0 - x + (y - 2.0) * (y - 2.0), 1.0, 2.0 * (y - 1.0), -1.0, 2.0 * (y - 2.0)};
  };
  const auto found = numeric::minimax_of_two_peaks(peaks, 0.5, {0.1, 3.0}, {0.5, 4.0}, 1e-10);
  REQUIRE(found);
  CHECK(found->x == Approx(1.0).epsilon(1e-9));
  CHECK(found->y == Approx(1.5).epsilon(1e-9));
  CHECK(found->height == Approx(1.25).epsilon(1e-9));

  SECTION("also where the two peaks end soon after the optimum") {
    const auto short_lived = [&](double x, double y) -> std::optional<numeric::PeakPair> {
      if (y > 1.52) return {};
      return peaks(x, y);
    };
    const auto near_end = numeric::minimax_of_two_peaks(short_lived, 0.5, {0.1, 3.0}, {0.5, 4.0}, 1e-10);
    REQUIRE(near_end);
    CHECK(near_end->y == Approx(1.5).epsilon(1e-8));
  }
  SECTION("and nothing where the height falls over the whole bracket") {
    CHECK_FALSE(numeric::minimax_of_two_peaks(peaks, 0.5, {0.1, 3.0}, {0.5, 1.4}, 1e-10));
  }
}
