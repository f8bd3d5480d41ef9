#include "stillmass/base/unit.hpp"

#include <array>
#include <numbers>
#include <string>
#include <utility>

#include "stillmass/base/text.hpp"

namespace stillmass::base {
namespace {

constexpr double inch = 0.0254;                  // exact, international inch
constexpr double pound_force = 4.4482216152605;  // exact, 0.45359237 kg * standard gravity
constexpr double degree = std::numbers::pi / 180.0;

constexpr auto units = std::to_array<Unit>({
    {"1", Quantity::ratio, 1.0},
    {"%", Quantity::ratio, 0.01},
    {"m/s2", Quantity::acceleration, 1.0},
    {"cm/s2", Quantity::acceleration, 1e-2},
    {"mm/s2", Quantity::acceleration, 1e-3},
    {"um/s2", Quantity::acceleration, 1e-6},
    {"in/s2", Quantity::acceleration, inch},
    {"ft/s2", Quantity::acceleration, 12.0 * inch},
    {"g", Quantity::acceleration, standard_gravity},
    {"mg", Quantity::acceleration, 1e-3 * standard_gravity},
    {"m/s", Quantity::velocity, 1.0},
    {"mm/s", Quantity::velocity, 1e-3},
    {"in/s", Quantity::velocity, inch},
    {"m", Quantity::displacement, 1.0},
    {"mm", Quantity::displacement, 1e-3},
    {"um", Quantity::displacement, 1e-6},
    {"mil", Quantity::displacement, 1e-3 * inch},
    {"in", Quantity::displacement, inch},
    {"N", Quantity::force, 1.0},
    {"kN", Quantity::force, 1e3},
    {"lbf", Quantity::force, pound_force},
    {"V", Quantity::voltage, 1.0},
    {"mV", Quantity::voltage, 1e-3},
    {"tacho", Quantity::pulse, 1.0},
    {"Hz", Quantity::frequency, 1.0},
    {"rpm", Quantity::speed, 1.0 / 60.0},
    {"s", Quantity::time, 1.0},
    {"ms", Quantity::time, 1e-3},
    {"us", Quantity::time, 1e-6},
    {"kg", Quantity::mass, 1.0},
    {"N/m", Quantity::stiffness, 1.0},
    {"N s/m", Quantity::damping, 1.0},
    {"rad", Quantity::angle, 1.0},
    {"deg", Quantity::angle, degree},
    {"degC", Quantity::temperature, 1.0},
});

// Other spellings of the names above, in lower case; seen in loggers' headers.
constexpr auto spellings = std::to_array<std::pair<std::string_view, std::string_view>>({
    {"m/s^2", "m/s2"},
    {"m/s\xc2\xb2", "m/s2"},
    {"m/s/s", "m/s2"},
    {"m/sec2", "m/s2"},
    {"m/sec^2", "m/s2"},
    {"m/s**2", "m/s2"},
    {"ms-2", "m/s2"},
    {"m s-2", "m/s2"},
    {"m*s-2", "m/s2"},
    {"mm/s^2", "mm/s2"},
    {"mm/s\xc2\xb2", "mm/s2"},
    {"cm/s^2", "cm/s2"},
    {"cm/s\xc2\xb2", "cm/s2"},
    {"gal", "cm/s2"},
    {"um/s^2", "um/s2"},
    {"\xc2\xb5m/s\xc2\xb2", "um/s2"},
    {"\xc2\xb5m/s2", "um/s2"},
    {"\xc2\xb5m/s^2", "um/s2"},
    {"in/s^2", "in/s2"},
    {"in/s\xc2\xb2", "in/s2"},
    {"ft/s^2", "ft/s2"},
    {"ft/s\xc2\xb2", "ft/s2"},
    {"mps2", "m/s2"},
    {"m s^-2", "m/s2"},
    {"gn", "g"},
    {"g's", "g"},
    {"gs", "g"},
    {"g_n", "g"},
    {"mm/sec", "mm/s"},
    {"m/sec", "m/s"},
    {"ips", "in/s"},
    {"in/sec", "in/s"},
    {"inch/s", "in/s"},
    {"micron", "um"},
    {"microns", "um"},
    {"\xc2\xb5m", "um"},
    {"\xce\xbcm", "um"},
    {"mils", "mil"},
    {"newton", "N"},
    {"newtons", "N"},
    {"lb", "lbf"},
    {"lbs", "lbf"},
    {"pounds", "lbf"},
    {"pound", "lbf"},
    {"volt", "V"},
    {"volts", "V"},
    {"pulse", "tacho"},
    {"pulses", "tacho"},
    {"r/min", "rpm"},
    {"1/min", "rpm"},
    {"sec", "s"},
    {"seconds", "s"},
    {"second", "s"},
    {"msec", "ms"},
    {"\xc2\xb5s", "us"},
    {"usec", "us"},
    {"-", "1"},
    {"degrees", "deg"},
    {"\xc2\xb0", "deg"},
    {"\xc2\xb0"
     "c",
     "degC"},
});

}  // namespace

std::optional<Unit> unit_named(std::string_view name) {
  const std::string_view exact = trimmed(name);
  for (const Unit& unit : units) {
    if (unit.name == exact) return unit;
  }
  const std::string low = lower(exact);
  for (const auto& [spelling, meant] : spellings) {
    if (spelling == low) return unit_named(meant);
  }
  // Upper-case spellings ("MM/S", "G"), but never "Mm", "MHz", "mN": there case carries the meaning.
  const bool all_upper = exact.find_first_of("abcdefghijklmnopqrstuvwxyz") == std::string_view::npos;
  for (const Unit& unit : units) {
    if ((all_upper || exact == low) && lower(unit.name) == low) return unit;
  }
  return {};
}

Unit si_unit(Quantity quantity) {
  switch (quantity) {
    case Quantity::ratio:
      return {"1", quantity, 1.0};
    case Quantity::acceleration:
      return {"m/s2", quantity, 1.0};
    case Quantity::velocity:
      return {"m/s", quantity, 1.0};
    case Quantity::displacement:
      return {"m", quantity, 1.0};
    case Quantity::force:
      return {"N", quantity, 1.0};
    case Quantity::voltage:
      return {"V", quantity, 1.0};
    case Quantity::pulse:
      return {"tacho", quantity, 1.0};
    case Quantity::frequency:
    case Quantity::speed:
      return {"Hz", quantity, 1.0};
    case Quantity::time:
      return {"s", quantity, 1.0};
    case Quantity::mass:
      return {"kg", quantity, 1.0};
    case Quantity::stiffness:
      return {"N/m", quantity, 1.0};
    case Quantity::damping:
      return {"N s/m", quantity, 1.0};
    case Quantity::angle:
      return {"rad", quantity, 1.0};
    case Quantity::temperature:
      return {"degC", quantity, 1.0};
  }
  return {"1", quantity, 1.0};
}

Unit trade_unit(Quantity quantity) {
  switch (quantity) {
    case Quantity::acceleration:
      return {"g", quantity, standard_gravity};
    case Quantity::velocity:
      return {"mm/s", quantity, 1e-3};
    case Quantity::displacement:
      return {"um", quantity, 1e-6};
    case Quantity::speed:
      return {"rpm", quantity, 1.0 / 60.0};
    case Quantity::angle:
      return {"deg", quantity, degree};
    default:
      return si_unit(quantity);
  }
}

bool is_motion(Quantity quantity) {
  return quantity == Quantity::acceleration || quantity == Quantity::velocity || quantity == Quantity::displacement;
}

std::string_view name(Quantity quantity) {
  switch (quantity) {
    case Quantity::ratio:
      return "ratio";
    case Quantity::acceleration:
      return "acceleration";
    case Quantity::velocity:
      return "velocity";
    case Quantity::displacement:
      return "displacement";
    case Quantity::force:
      return "force";
    case Quantity::voltage:
      return "voltage";
    case Quantity::pulse:
      return "pulse";
    case Quantity::frequency:
      return "frequency";
    case Quantity::speed:
      return "speed";
    case Quantity::time:
      return "time";
    case Quantity::mass:
      return "mass";
    case Quantity::stiffness:
      return "stiffness";
    case Quantity::damping:
      return "damping";
    case Quantity::angle:
      return "angle";
    case Quantity::temperature:
      return "temperature";
  }
  return "";
}

std::optional<Quantity> quantity_named(std::string_view wanted) {
  for (int i = 0; i <= static_cast<int>(Quantity::temperature); ++i) {
    const auto quantity = static_cast<Quantity>(i);
    if (name(quantity) == wanted) return quantity;
  }
  return {};
}

std::string_view name(Detector detector) {
  switch (detector) {
    case Detector::rms:
      return "rms";
    case Detector::peak:
      return "peak";
    case Detector::peak_to_peak:
      return "peak-to-peak";
  }
  return "";
}

std::optional<Detector> detector_named(std::string_view wanted) {
  for (const Detector detector : {Detector::rms, Detector::peak, Detector::peak_to_peak}) {
    if (name(detector) == wanted) return detector;
  }
  return {};
}

double from_rms(Detector detector) {
  switch (detector) {
    case Detector::rms:
      return 1.0;
    case Detector::peak:
      return std::numbers::sqrt2;
    case Detector::peak_to_peak:
      return 2.0 * std::numbers::sqrt2;
  }
  return 1.0;
}

}  // namespace stillmass::base
