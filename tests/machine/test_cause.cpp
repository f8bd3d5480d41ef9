#include "stillmass/machine/bearing.hpp"
#include "stillmass/machine/cause.hpp"
#include "stillmass/machine/forcing.hpp"
#include "stillmass/numeric/random.hpp"

#include "machine/machines.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using machine::Machine;
using tests::hertz;
using tests::two_pole_pump;

namespace {

modal::Mode mode_at(double frequency, double zeta) {
  modal::Mode out;
  out.frequency = hertz(frequency, 0.1);
  out.damping_ratio.value = zeta;
  return out;
}

}  // namespace

TEST_CASE("2x of a two-pole motor and twice line frequency are told apart only where the lines are fine enough") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));  // 2x: 98.8 Hz, 1.2 Hz below 100
  const auto coarse = machine::cause_of_peak(hertz(99.2, 0.1), 1.25, list);
  CHECK(coarse.ambiguous);
  CHECK_FALSE(coarse.forcing);
  CHECK(coarse.candidates.size() == 2);
  CHECK(coarse.strength == base::Strength::weak);
  CHECK(coarse.text.find("2x") != std::string::npos);
  CHECK(coarse.text.find("twice line frequency") != std::string::npos);

  const auto low = machine::cause_of_peak(hertz(98.81, 0.02), 0.25, list);
  CHECK_FALSE(low.ambiguous);
  CHECK(low.text == "2x");
  CHECK(low.strength == base::Strength::strong);
  const auto high = machine::cause_of_peak(hertz(99.99, 0.02), 0.25, list);
  CHECK(high.text == "twice line frequency");
}

TEST_CASE("a tight fit counts before a bearing that could be anywhere near") {
  Machine machine = two_pole_pump();
  machine.bearings = {{"wide", 8, 0.010, 0.0405, 0.0, ""}};  // outer ring 3.01 per turn
  const auto list = machine::forcing_frequencies(machine, hertz(49.4, 0.01));
  const auto cause = machine::cause_of_peak(hertz(148.2, 0.05), 0.5, list);
  CHECK(cause.text == "3x");
  CHECK(cause.candidates.size() == 2);
  const auto beside = machine::cause_of_peak(hertz(150.9, 0.05), 0.5, list);
  CHECK(beside.text == "outer ring of bearing wide");
  CHECK(beside.strength == base::Strength::fair);
}

TEST_CASE("no bearing explains a peak more than 2 % away from it") {
  // Cages slip by 1 to 2 % (common practice): 3 % off is another cause.
  Machine machine = two_pole_pump();
  machine.bearings = {{"wide", 8, 0.010, 0.0405, 0.0, ""}};
  const auto list = machine::forcing_frequencies(machine, hertz(49.4, 0.01));
  const double outer = 4.0 * (1.0 - 0.010 / 0.0405) * 49.4;
  CHECK(machine::cause_of_peak(hertz(1.018 * outer, 0.05), 0.5, list).text == "outer ring of bearing wide");
  CHECK(machine::cause_of_peak(hertz(1.024 * outer, 0.05), 0.5, list).text == "unexplained");
}

TEST_CASE("an uncertain speed does not let a high order explain everything") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.6));  // 12x: 592.8 +- 7.2 Hz
  const auto far = machine::cause_of_peak(hertz(610.0, 0.05), 0.5, list);             // within 3 u, but 2.9 % away
  CHECK(far.text == "unexplained");
}

TEST_CASE("a half order is named where it fits, and never makes 1x ambiguous") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));
  const auto half = machine::cause_of_peak(hertz(24.72, 0.02), 0.25, list);
  CHECK(half.text == "0.5x");
  CHECK(half.strength == base::Strength::fair);
  const auto coarse = machine::cause_of_peak(hertz(60.0, 1.0), 30.0, list);
  CHECK(coarse.text.find(".5x") == std::string::npos);
}

TEST_CASE("a pole-pass band one line beside 1x is the band, and the line at 1x is 1x") {
  Machine motor;
  motor.line_frequency_hz = 50.0;
  motor.motor_poles = 4;
  const auto list = machine::forcing_frequencies(motor, hertz(24.93, 0.002));  // slip 0.07 Hz, pole pass 0.28 Hz
  CHECK(machine::cause_of_peak(hertz(24.65, 0.01), 0.25, list).text == "1x - pole pass");
  CHECK(machine::cause_of_peak(hertz(24.93, 0.01), 0.25, list).text == "1x");
}

TEST_CASE("a peak that no forcing explains is a natural frequency where one is, else unexplained") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));
  const std::vector<modal::Mode> modes = {mode_at(31.0, 0.02)};
  const auto natural = machine::cause_of_peak(hertz(31.3, 0.05), 0.5, list, modes);
  CHECK(natural.text == "natural frequency 31 Hz");
  CHECK(natural.mode == std::size_t{0});
  CHECK_FALSE(natural.forcing);
  const auto none = machine::cause_of_peak(hertz(70.0, 0.05), 0.5, list, modes);
  CHECK(none.text == "unexplained");
  CHECK(none.candidates.empty());
}

TEST_CASE("a peak that the stopped machine shows too is the background's, whatever fits") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));
  const machine::Peak peak{hertz(49.41, 0.01), 2.0, 1};
  const std::vector<machine::Peak> stopped = {{hertz(49.40, 0.01), 1.5, 1}, {hertz(98.8, 0.01), 9.0, 0}};
  CHECK(machine::stands_in_background(peak, stopped, 0.25));
  const auto cause = machine::cause_of_peak(peak.frequency, 0.25, list, {}, true);
  CHECK(cause.text == "background");
  CHECK(cause.from_background);
  CHECK_FALSE(cause.forcing);
  CHECK_FALSE(cause.candidates.empty());
  CHECK_FALSE(machine::stands_in_background({hertz(49.41, 0.01), 4.0, 1}, stopped, 0.25));  // twice as strong now
  CHECK_FALSE(machine::stands_in_background({hertz(98.8, 0.01), 2.0, 1}, stopped, 0.25));   // another channel's
}

TEST_CASE("few lines at random are explained by chance") {
  // Lines anywhere in 5 to 500 Hz, 0.25 Hz apart. A pump alone, and with two rolling bearings of all harmonics.
  const bool bearings = GENERATE(false, true);
  Machine machine = two_pole_pump();
  if (bearings) machine.bearings = {*machine::bearing_named("6205"), *machine::bearing_named("6203")};
  const auto list = machine::forcing_frequencies(machine, hertz(49.4, 0.005));
  const numeric::Random random(5);
  constexpr int draws = 20000;
  int strong = 0;
  int fair = 0;
  int named = 0;
  for (std::uint64_t draw = 0; draw < draws; ++draw) {
    const auto cause = machine::cause_of_peak(hertz(5.0 + 495.0 * random.uniform(draw, 0), 0.02), 0.25, list);
    strong += cause.strength == base::Strength::strong ? 1 : 0;
    fair += cause.strength == base::Strength::fair ? 1 : 0;
    named += cause.text != machine::unexplained ? 1 : 0;
  }
  INFO("strong " << strong << ", fair " << fair << ", named at all " << named << " of " << draws);
  // Ten frequencies of rank 0 below 500 Hz, each half a hertz wide: 1 %.
  CHECK(strong < 0.012 * draws);
  CHECK(named < (bearings ? 0.14 : 0.025) * draws);
  CHECK(fair <
        (bearings ? 0.13 : 0.015) * draws);  // eight bearing frequencies within 2 %, 1300 Hz together: 52 of 495 Hz
}

TEST_CASE("harmonics of a bearing count where its fundamental stands, at whole multiples of that") {
  Machine machine = two_pole_pump();
  machine.bearings = {*machine::bearing_named("6205")};
  const auto list = machine::forcing_frequencies(machine, hertz(49.4, 0.005));
  const double outer = 1.008 * 3.5848 * 49.4;  // it slips: 178.5 Hz
  std::vector<machine::Peak> peaks = {
      {hertz(outer, 0.02), 1.0}, {hertz(2.0 * outer + 0.1, 0.02), 0.5}, {hertz(3.0 * outer + 2.0, 0.02), 0.5}};
  const auto causes = machine::causes_of_peaks(peaks, 0.25, list);
  REQUIRE(causes.size() == 3);
  CHECK(causes[0].text == "outer ring of bearing 6205");
  CHECK(causes[1].text == "2x outer ring of bearing 6205");
  CHECK(causes[1].strength == base::Strength::fair);
  CHECK(causes[2].text == "unexplained");  // 2 Hz beside three times: not its harmonic
  CHECK_FALSE(causes[2].candidates.empty());
  peaks[0].channel = 1;  // the fundamental at another channel: no proof here
  CHECK(machine::causes_of_peaks(peaks, 0.25, list)[1].text == "unexplained");
  const std::vector<machine::Peak> stopped = {{hertz(2.0 * outer, 0.02), 0.4, 0}};
  CHECK(machine::causes_of_peaks(peaks, 0.25, list, {}, stopped)[1].text == "background");
}
