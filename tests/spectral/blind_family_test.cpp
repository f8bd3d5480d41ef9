#include "stillmass/spectral/blind_family.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>

#include "stillmass/numeric/random.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using spectral::Tone;

namespace {

constexpr double line_hz = 0.5;
constexpr double u_hz = 0.01;

/// Made-up tones of known truth, their frequencies off by a normal error of their u.
class List {
 public:
  explicit List(std::uint64_t seed, std::uint64_t case_number = 0) : random_(seed), case_(case_number) {}

  double normal() { return random_.normal(case_, draw_++); }
  double uniform() { return random_.uniform(case_, draw_++); }

  void add(double frequency_hz, double rms, double u = u_hz) {
    Tone tone;
    tone.frequency = {frequency_hz + std::max(u, 0.05 * line_hz) * normal(), u, std::nullopt,
                      base::Quantity::frequency};
    tone.amplitude_rms = {rms, 0.01 * rms, std::nullopt, base::Quantity::velocity};
    tones.push_back(tone);
  }
  void add_random(std::size_t count, double lo = 5.0, double hi = 1000.0) {
    for (std::size_t i = 0; i < count; ++i) {
      const double f = lo + (hi - lo) * uniform();
      add(f, 0.05 + uniform());
    }
  }
  spectral::Families families() const { return spectral::families(tones, line_hz); }

  std::vector<Tone> tones;

 private:
  numeric::Random random_;
  std::uint64_t case_;
  std::uint32_t draw_ = 0;
};

std::vector<int> numbers(const std::vector<spectral::FamilyMember>& members) {
  std::vector<int> all;
  for (const auto& member : members) all.push_back(member.number);
  return all;
}

}  // namespace

TEST_CASE("random tones make no family") {
  // 500 sets each of 10, 20, 50, 100 tones; seed 111. Accepted: 2 % of the sets with a family of either kind.
  for (const std::size_t count : {10U, 20U, 50U, 100U}) {
    int harmonic = 0, side = 0;
    constexpr int sets = 500;
    for (std::uint64_t c = 0; c < sets; ++c) {
      List list(111, 1000 * count + c);
      list.add_random(count);
      const auto found = list.families();
      harmonic += !found.harmonics.empty();
      side += !found.side_bands.empty();
    }
    CAPTURE(count, harmonic, side);
    CHECK(harmonic <= 0.02 * sets);
    CHECK(side <= 0.02 * sets);
  }
}

TEST_CASE("one family among unrelated tones is found with its fundamental, members and missing numbers") {
  const std::vector<int> truth{1, 2, 3, 5, 6, 8};
  int one = 0, right = 0, covered = 0;
  constexpr int sets = 200;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(112, c);
    const double turn = 10.0 + 30.0 * list.uniform();
    for (const int k : truth) list.add(turn * k, 1.0 / k);
    list.add_random(12);
    const auto found = list.families();
    if (found.harmonics.size() != 1) continue;
    ++one;
    const auto& family = found.harmonics.front();
    right += numbers(family.members) == truth && family.missing == std::vector<int>{4, 7} && !family.half_orders;
    covered += std::abs(family.fundamental.value - turn) <= 2.0 * *family.fundamental.u;
  }
  // A true member is beyond 2.5 u in 1.2 % of cases, so one of six in 7 %; a normal error is within 2 u in 95.4 %.
  CAPTURE(one, right, covered);
  CHECK(one >= 0.97 * sets);
  CHECK(right >= 0.85 * sets);
  CHECK(covered >= 0.90 * one);
}

TEST_CASE("the fundamental is the weighted least-squares one") {
  // f_k / k weighted by (k / u)^2: u of the mean of 24.6 x 1 ... 4, u 0.025 each, is 0.025 / sqrt(1 + 4 + 9 + 16).
  List list(113);
  for (int k = 1; k <= 4; ++k) list.add(24.6 * k, 1.0);
  const auto found = list.families();
  REQUIRE(found.harmonics.size() == 1);
  const auto& family = found.harmonics.front();
  double sum = 0.0;
  for (int k = 1; k <= 4; ++k) sum += k * list.tones[static_cast<std::size_t>(k) - 1].frequency.value / 30.0;
  CHECK(family.fundamental.value == Approx(sum).epsilon(1e-12));
  CHECK(*family.fundamental.u == Approx(0.025 / std::sqrt(30.0)));
  CHECK(family.missing.empty());
  CHECK(family.chance < 1e-4);
}

TEST_CASE("two families are two") {
  int right = 0;
  constexpr int sets = 100;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(114, c);
    for (const int k : {1, 2, 3, 4, 5}) list.add(24.63 * k, 1.0);
    for (const int k : {1, 2, 3, 4}) list.add(17.21 * k, 0.5);
    list.add_random(5);
    const auto found = list.families();
    if (found.harmonics.size() != 2) continue;
    std::vector<double> f{found.harmonics[0].fundamental.value, found.harmonics[1].fundamental.value};
    std::sort(f.begin(), f.end());
    right += std::abs(f[0] - 17.21) < 0.05 && std::abs(f[1] - 24.63) < 0.05;
  }
  CHECK(right >= 0.95 * sets);
}

TEST_CASE("no family is explained by a half or a third of its fundamental") {
  int low = 0, found_one = 0;
  constexpr int sets = 200;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(115, c);
    for (int k = 1; k <= 8; ++k) list.add(49.6 * k, 1.0 / k);
    list.add(49.6 * 1.5, 0.05);  // one chance companion of f0 / 2
    list.add_random(15);
    const auto found = list.families();
    if (found.harmonics.empty()) continue;
    ++found_one;
    low += found.harmonics.front().fundamental.value < 45.0;
  }
  CAPTURE(low, found_one);
  CHECK(found_one == sets);
  CHECK(low <= 0.02 * sets);
}

TEST_CASE("a strong 1x with 2x, 6x and 12x is a family of 1x, though only 1x itself is odd") {
  int right = 0;
  constexpr int sets = 100;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(119, c);
    list.add(24.63, 8.0);
    list.add(49.26, 0.5);
    list.add(147.78, 1.6);
    list.add(295.56, 0.1);
    list.add_random(5);
    const auto found = list.families();
    if (found.harmonics.empty()) continue;
    right += std::abs(found.harmonics.front().fundamental.value - 24.63) < 0.1;
  }
  CAPTURE(right);
  CHECK(right >= 0.9 * sets);
}

TEST_CASE("half orders are said as such") {
  List list(116);
  for (const int k : {1, 2, 3, 4}) list.add(24.8 * k, 1.0 / k);
  for (const double k : {0.5, 1.5, 2.5, 3.5}) list.add(24.8 * k, 0.1);
  list.add_random(8);
  const auto found = list.families();
  REQUIRE(!found.harmonics.empty());
  const auto& family = found.harmonics.front();
  CHECK(family.fundamental.value == Approx(12.4).epsilon(1e-3));
  CHECK(family.half_orders);
  CHECK(family.members.size() >= 8);
  // A strong second harmonic alone makes no half orders.
  List strong(117);
  const double rms[] = {0.3, 2.0, 0.3, 0.2, 0.1};
  for (int k = 1; k <= 5; ++k) strong.add(24.8 * k, rms[k - 1]);
  REQUIRE(strong.families().harmonics.size() == 1);
  CHECK(strong.families().harmonics.front().fundamental.value == Approx(24.8).epsilon(1e-3));
  CHECK_FALSE(strong.families().harmonics.front().half_orders);
}

TEST_CASE("side bands of pole-pass spacing about the harmonics of the speed are found") {
  int two = 0, three = 0;
  constexpr int sets = 100;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(118, c);
    const double spacing = 0.8 + list.uniform();
    for (int k = 1; k <= 3; ++k) {
      list.add(24.6 * k, 1.0 / k);
      list.add(24.6 * k - spacing, 0.2 / k);
      list.add(24.6 * k + spacing, 0.15 / k);
    }
    list.add_random(8);
    const auto found = list.families();
    const auto of_spacing = std::count_if(found.side_bands.begin(), found.side_bands.end(), [&](const auto& family) {
      return std::abs(family.spacing.value - spacing) < 3.0 * *family.spacing.u && family.symmetric;
    });
    two += of_spacing >= 2 && found.harmonics.size() == 1;
    three += of_spacing >= 3;
  }
  // Of six side bands and three carriers one is beyond 2.5 u in some 10 % of cases; some sets are not told from chance.
  CAPTURE(two, three);
  CHECK(two >= 0.85 * sets);
  CHECK(three >= 0.75 * sets);
}

TEST_CASE(
    "side bands of shaft speed about a gear mesh are found, and the shaft's harmonics are not their own side bands") {
  int right = 0, own = 0;
  constexpr int sets = 100;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(119, c);
    const double turn = 24.0 + list.uniform();
    for (int k = 1; k <= 4; ++k) list.add(turn * k, 1.0 / k);
    list.add(turn * 23, 1.5);
    for (const int k : {-2, -1, 1, 2}) list.add(turn * (23 + k), 0.3);
    list.add_random(8);
    const auto found = list.families();
    bool mesh = false;
    for (const auto& family : found.side_bands) {
      const bool at_mesh = list.tones[family.carrier].frequency.value > 20.0 * turn;
      mesh = mesh || (at_mesh && std::abs(family.spacing.value - turn) < 4.0 * *family.spacing.u &&
                      family.spacing_of == 0U && numbers(family.members) == std::vector<int>{-2, -1, 1, 2});
      own += !at_mesh && family.spacing_of.has_value();
    }
    right += mesh;
  }
  CAPTURE(right, own);
  CHECK(right >= 0.9 * sets);
  CHECK(own <= 0.02 * sets);
}

TEST_CASE("side bands about one carrier alone need four to be believed, and harmonics alone have none") {
  int right = 0, none = 0;
  constexpr int sets = 100;
  for (std::uint64_t c = 0; c < sets; ++c) {
    List list(120, c);
    list.add(612.3, 1.0);
    for (const int k : {-2, -1, 1, 2}) list.add(612.3 + k * 18.31, 0.3);
    list.add_random(15);
    const auto found = list.families();
    for (const auto& family : found.side_bands) right += family.carrier == 0 && family.members.size() >= 4;
    List harmonics(121, c);
    for (int k = 1; k <= 10; ++k) harmonics.add(24.6 * k, k == 4 ? 1.5 : 1.0 / k);
    harmonics.add_random(5);
    none += harmonics.families().side_bands.empty();
  }
  CAPTURE(right, none);
  CHECK(right >= 0.95 * sets);
  CHECK(none >= 0.97 * sets);
}

TEST_CASE("tones of several channels are one list") {
  List a(122), b(123);
  for (const int k : {1, 2, 3}) a.add(24.6 * k, 1.0);
  for (const int k : {2, 3, 5}) b.add(24.6 * k, 2.0);
  const std::vector<std::vector<Tone>> channels{a.tones, b.tones};
  const auto all = spectral::gathered(channels, line_hz);
  REQUIRE(all.size() == 4);
  CHECK(std::is_sorted(all.begin(), all.end(),
                       [](const Tone& x, const Tone& y) { return x.frequency.value < y.frequency.value; }));
  CHECK(all[1].amplitude_rms.value == 2.0);
  CHECK(all[1].frequency.value ==
        Approx(0.5 * (a.tones[1].frequency.value + b.tones[0].frequency.value)).epsilon(1e-12));
  CHECK(*all[1].frequency.u == Approx(0.025 / std::sqrt(2.0)));
  const auto found = spectral::families(all, line_hz);
  REQUIRE(found.harmonics.size() == 1);
  CHECK(numbers(found.harmonics.front().members) == std::vector<int>{1, 2, 3, 5});
  CHECK(found.harmonics.front().missing == std::vector<int>{4});
}

TEST_CASE("200 tones take milliseconds, and few or none take nothing") {
  List list(124);
  for (int k = 1; k <= 10; ++k) list.add(24.6 * k, 1.0);
  list.add_random(190, 5.0, 5000.0);
  const auto start = std::chrono::steady_clock::now();
  CHECK_FALSE(list.families().harmonics.empty());
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - start;
  CAPTURE(took.count());
  CHECK(took.count() < 0.5);  // measured: about 20 ms; a sanitizer takes ten times that
  CHECK(spectral::families({}, line_hz).harmonics.empty());
  CHECK(spectral::families(std::vector<Tone>(list.tones.begin(), list.tones.begin() + 1), line_hz).side_bands.empty());
  CHECK(spectral::families(std::vector<Tone>(5, list.tones.front()), line_hz).harmonics.empty());
}
