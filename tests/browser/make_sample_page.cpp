// Writes a page with every kind of block and chart, for the browser test: make_sample_page FILE
#include <cmath>
#include <complex>
#include <fstream>
#include <iostream>
#include <numbers>

#include "stillmass/report/page.hpp"

namespace {

using namespace stillmass::report;

constexpr double natural = 24.6, damping = 0.012;

/// Velocity per force of one degree of freedom, in mm/s per N.
std::complex<double> mobility(double frequency, double mass = 380.0) {
  const std::complex<double> i(0.0, 1.0);
  const double r = frequency / natural;
  return 1e3 * i * 2.0 * std::numbers::pi * frequency /
         (mass * std::pow(2.0 * std::numbers::pi * natural, 2) * (1.0 - r * r + 2.0 * i * damping * r));
}

/// Ripple that repeats: noise for the eye, the same on every machine.
double ripple(double x, double seed) {
  return 0.5 + 0.5 * std::abs(std::sin(37.1 * x + seed) * std::sin(11.3 * x * x + 2.0 * seed));
}

double spectrum_value(double frequency, double seed) {
  double value = 0.004 * ripple(frequency, seed) * (1.0 + 8.0 / (1.0 + std::pow((frequency - natural) / 3.0, 2)));
  const auto line = [&](double at, double height) {
    value += height * std::exp(-std::pow((frequency - at) / 0.35, 2));
  };
  line(24.63, 5.1 + 0.3 * seed);
  line(49.3, 0.8);
  line(100.0, 0.31 * seed);
  line(147.8, 1.3 / seed);
  return value;
}

std::vector<double> grid(double from, double to, std::size_t count) {
  std::vector<double> x(count);
  for (std::size_t i = 0; i < count; ++i)
    x[i] = from + (to - from) * static_cast<double>(i) / static_cast<double>(count - 1);
  return x;
}

template <class F>
std::vector<double> over(const std::vector<double>& x, F f) {
  std::vector<double> y;
  for (const double value : x) y.push_back(f(value));
  return y;
}

Mark upright(double at, std::string label, MarkKind kind) { return {Direction::vertical, at, std::move(label), kind}; }

Chart spectrum() {
  const auto f = grid(0.0, 400.0, 6401);
  Chart chart{.title = "Velocity spectra at the drive end",
              .caption = "Hann window, 40 averages, lines 0.0625 Hz apart.",
              .x = {"Frequency", "Hz"}};
  Panel panel{.y = {"Velocity", "mm/s r.m.s."}};
  panel.series = {series_of("pump-de-h", f, over(f, [](double x) { return spectrum_value(x, 1.0); })),
                  series_of("pump-de-v", f, over(f, [](double x) { return 0.6 * spectrum_value(x, 2.0); }))};
  panel.marks = {upright(natural, "natural frequency 24.6 Hz", MarkKind::natural_frequency),
                 upright(24.63, "1x", MarkKind::forcing_frequency),
                 upright(49.26, "2x", MarkKind::forcing_frequency),
                 upright(100.0, "2 x line", MarkKind::forcing_frequency),
                 upright(147.8, "vane pass", MarkKind::forcing_frequency),
                 upright(295.6, "2 x vane pass", MarkKind::forcing_frequency),
                 upright(392.0, "gear mesh", MarkKind::forcing_frequency)};
  panel.callouts = {{24.625, spectrum_value(24.625, 1.0), "5.4 at 24.63 Hz"},
                    {147.8, spectrum_value(147.8, 1.0), "1.3"}};
  chart.panels = {panel};
  return chart;
}

Chart logarithmic_spectrum() {
  Chart chart = spectrum();
  chart.title = "The same on logarithmic scales";
  chart.x.scale = Scale::logarithmic;
  chart.x.range = {2.0, 400.0};
  chart.panels[0].y.scale = Scale::logarithmic;
  chart.panels[0].zones = {{Direction::vertical, 23.4, 25.8, "speed range", Tone::neutral}};
  return chart;
}

Chart frequency_response() {
  const auto f = grid(5.0, 60.0, 1101);
  Chart chart{.title = "Mobility at the drive end", .caption = "H1, 5 blows, force window.", .x = {"Frequency", "Hz"}};
  const std::vector<Mark> marks{upright(natural, "24.60 Hz, 1.2 %", MarkKind::natural_frequency)};
  Panel magnitude{.y = {"Mobility", "mm/s per N", Scale::logarithmic}, .marks = marks, .height = 1.6};
  magnitude.series = {
      series_of("measured", f, over(f, [](double x) { return std::abs(mobility(x)) * (0.9 + 0.2 * ripple(x, 1.0)); })),
      series_of("curve fit", f, over(f, [](double x) { return std::abs(mobility(x)); }))};
  magnitude.bands = {{"95 % interval", f, over(f, [](double x) { return 0.8 * std::abs(mobility(x)); }),
                      over(f, [](double x) { return 1.25 * std::abs(mobility(x)); })}};
  Panel phase{.y = {"Phase", "deg"}, .marks = marks};
  phase.y.range = {-190.0, 190.0};
  phase.y.tick_step = 90.0;
  phase.series = {
      series_of("measured", f,
                over(f, [](double x) { return std::arg(mobility(x)) * 57.29578 + 8.0 * (ripple(x, 3.0) - 0.75); })),
      series_of("curve fit", f, over(f, [](double x) { return std::arg(mobility(x)) * 57.29578; }))};
  Panel coherence{.y = {"Coherence", ""}, .marks = marks, .height = 0.7};
  coherence.y.range = {0.0, 1.05};
  coherence.series = {series_of(
      "measured", f, over(f, [](double x) { return x < 8.0 ? std::nan("") : 0.93 + 0.07 * ripple(x, 2.0); }))};
  chart.panels = {magnitude, phase, coherence};
  return chart;
}

Chart waterfall() {
  Chart chart{.title = "Waterfall of the run-up", .caption = "One spectrum for each 10 rpm.", .x = {"Frequency", "Hz"}};
  Panel panel{.y = {"Speed", "rpm"}};
  HeatMap map{.label = "Velocity", .unit = "mm/s r.m.s.", .scale = Scale::logarithmic};
  map.x = grid(0.0, 120.0, 481);
  map.y = grid(600.0, 1800.0, 121);
  for (const double speed : map.y) {
    for (const double f : map.x) {
      double value = 0.004 * ripple(f + 0.01 * speed, 1.0);
      for (int order = 1; order <= 4; ++order) {
        const double at = order * speed / 60.0;
        value += 12.0 / order * std::abs(mobility(std::max(at, 1.0))) * std::exp(-std::pow((f - at) / 0.5, 2));
      }
      map.values.push_back(value);
    }
  }
  panel.heat_map = map;
  for (int order = 1; order <= 2; ++order) {
    panel.series.push_back(
        series_of(std::to_string(order) + "x", std::vector{order * 10.0, order * 30.0}, std::vector{600.0, 1800.0}));
  }
  panel.marks = {upright(natural, "24.6 Hz", MarkKind::natural_frequency)};
  chart.panels = {panel};
  return chart;
}

Chart severity() {
  Chart chart{.title = "Severity at the bearing housings", .x = {"Point", ""}};
  chart.x.categories = {"pump-de-h", "pump-de-v", "pump-de-a", "motor-de-h", "motor-nde-h"};
  Panel panel{.y = {"Velocity", "mm/s r.m.s., 10 to 1000 Hz"}};
  Series bars =
      series_of("before", std::vector{0.0, 1.0, 2.0, 3.0, 4.0}, std::vector{5.6, 2.9, 1.4, 3.3, 2.1}, Style::bars);
  bars.error = {0.3, 0.2, 0.1, 0.2, 0.15};
  panel.series = {bars};
  panel.zones = {{Direction::horizontal, {}, 2.5, "zone A", Tone::good},
                 {Direction::horizontal, 2.5, 4.0, "zone B", Tone::neutral},
                 {Direction::horizontal, 4.0, 6.6, "zone C", Tone::caution},
                 {Direction::horizontal, 6.6, {}, "zone D", Tone::bad}};
  panel.marks = {{Direction::horizontal, 2.8, "target 2.8 mm/s", MarkKind::limit}};
  chart.panels = {panel};
  return chart;
}

Chart nyquist() {
  Chart chart{.title = "Mobility in the complex plane", .x = {"Real part", "mm/s per N"}, .equal_scales = true};
  Panel panel{.y = {"Imaginary part", "mm/s per N"}};
  const auto f = grid(22.0, 27.0, 81), dense = grid(5.0, 80.0, 4000);
  panel.series = {series_of("lines", over(f, [](double x) { return mobility(x).real(); }),
                            over(f, [](double x) { return mobility(x).imag(); }), Style::points),
                  series_of("curve fit", over(dense, [](double x) { return mobility(x).real(); }),
                            over(dense, [](double x) { return mobility(x).imag(); }))};
  chart.panels = {panel};
  return chart;
}

Chart tones() {
  Chart chart{.title = "Tones found, and the level held in each minute", .x = {"Time", "min"}};
  Panel stems{.y = {"Amplitude", "mm/s peak"}}, steps{.y = {"Level", "mm/s r.m.s."}};
  stems.series = {series_of("tones", std::vector{1.0, 2.5, 4.0, 7.0}, std::vector{2.0, 0.7, 1.1, 0.4}, Style::stems)};
  steps.series = {series_of("level", grid(0.0, 9.0, 10), std::vector{2.0, 2.1, 2.6, 2.2, 2.0, 1.4, 1.3, 1.3, 1.9, 2.0},
                            Style::step)};
  steps.series.push_back(series_of("standstill", std::vector{0.0, 9.0}, std::vector{0.12, 0.12}));
  steps.series.back().quiet = true;
  chart.panels = {stems, steps};
  return chart;
}

SpecSheet sheet() {
  SpecSheet s{.title = "Absorber at pump-de-h, horizontal",
              .purpose = "Takes up the 1x vibration at 1478 rpm; damped, tuned to 23.9 Hz."};
  s.rows = {{"Mass at the tip", "8.40 kg", "±0.05 kg", "with bolts and nuts"},
            {"Frequency on a rigid clamp", "23.9 Hz", "±0.1 Hz", "tap it, count"},
            {"Damping ratio", "0.11", "0.08 to 0.14", ""},
            {"Blade", "spring steel, 60 x 8 mm", "thickness ±0.05 mm", "rolling direction along the blade"}};
  s.drawing = BladeDrawing{.free_length_m = 0.245,
                           .width_m = 0.060,
                           .thickness_m = 0.008,
                           .tip_mass_kg = 8.4,
                           .adjust_m = 0.015,
                           .travel_m = 0.0021,
                           .blades = 2,
                           .direction = "horizontal, +x",
                           .material = "spring steel, hardened",
                           .damper = "dashpot, 280 N s/m"};
  s.steps = {"Clamp the absorber to a heavy vice and tap it.", "Move the mass until it rings at 23.9 Hz.",
             "Fit it and record again at duty speed."};
  s.notes = {"Lock the mass with two nuts.", "Never run with a loose clamp."};
  return s;
}

MachineSketch sketch() {
  return {"Points",
          {{"motor-nde-h", {{0.0, 0.0, 0.5}}, "+y", "2.1 mm/s"},
           {"motor-de-h", {{0.7, 0.0, 0.5}}, "+y", "3.3 mm/s"},
           {"pump-de-h", {{1.1, 0.0, 0.45}}, "+y", "5.6 mm/s, zone C"},
           {"pump-de-v", {{1.1, 0.0, 0.55}}, "+z", "2.9 mm/s"},
           {"absorber here", {{1.25, 0.25, 0.4}}, "", "", true},
           {"discharge pipe", {}, "horizontal", "not judged"}}};
}

Page page() {
  Page p{.title = "Cooling water pump 2 <b>& \"friends\"</b>", .subtitle = "Vibration survey", .tone = Tone::bad};
  p.facts = {{"Survey file", "survey.toml"},
             {"Recorded", "5 recordings, 2 stages"},
             {"Speed", "1478 rpm"},
             {"Power", "30 kW"},
             {"Written by", "stillmass 0.1.0"}};
  p.verdict = "The pump stands in a resonance at 24.6 Hz; an absorber of 8.4 kg brings it from 5.6 to 1.9 mm/s.";
  p.lines = {{"Recordings", "Good, except channel 3: clipped during 2 of 40 s.", Tone::caution},
             {"Severity", "5.6 mm/s r.m.s. at pump-de-h, zone C (limit B/C 4.0 mm/s).", Tone::bad},
             {"Cause", "Resonance: 1x at 24.63 Hz lies 0.1 % from the natural frequency 24.60 ± 0.04 Hz.", Tone::bad},
             {"Remedy", "A damped absorber, 8.4 kg, 23.9 Hz, at pump-de-h.", Tone::good},
             {"How sure", "94 % that the target of 2.8 mm/s is met; the modal mass (380 ± 25 kg) drives the spread.",
              Tone::neutral}};
  p.sections = {{"Specification", {sheet(), sketch()}},
                {"Vibration",
                 {Paragraph{"All values are r.m.s. velocity."}, spectrum(), logarithmic_spectrum(), severity(), tones(),
                  Table{"Peaks",
                        {"Frequency (Hz)", "Velocity (mm/s)", "Cause"},
                        {{"24.63 ± 0.01", "5.4", "unbalance, amplified"}, {"147.8", "1.3", "vane pass"}},
                        {"Peaks above 3 times the noise floor."}}}},
                {"Resonance", {frequency_response(), waterfall()}},
                {"Assumptions and cautions",
                 {Caution{Tone::caution, "Stopped is not running.",
                          "The mode was measured on the stopped machine: 2 % is allowed for its shift."},
                  Caution{Tone::neutral, "", "The foundation was taken as flexible."},
                  Bullets{{"One mode carries the response.", "The force does not change."}}}},
                {"Inputs",
                 {Details{"Hashes of the recordings",
                          {Table{"",
                                 {"File", "SHA-256"},
                                 {{"duty.wav", "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08"}}},
                           nyquist()}}}}};
  return p;
}

}  // namespace

int main(int count, char** arguments) {
  if (count != 2) {
    std::cerr << "make_sample_page FILE\n";
    return 2;
  }
  std::ofstream(arguments[1], std::ios::binary) << html(page());
}
