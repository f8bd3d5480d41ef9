#include "stillmass/step/absorber.hpp"

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/result_read.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {
namespace {

using base::Quantity;

base::Estimate estimate(const UncertainNumber& number, Quantity quantity) {
  return {number.value, number.u, {}, quantity};
}

modal::Mode mode_from(const Arguments& arguments) {
  const auto frequency = arguments.estimate("--mode-frequency");
  const auto damping = arguments.estimate("--mode-damping");
  const auto mass = arguments.estimate("--mode-mass");
  if (const auto file = arguments.text("--result")) {
    if (frequency || damping || mass) throw base::usage_error("", "--result and --mode-... exclude each other");
    const std::vector<modal::Mode> modes = report::read_modes(*file);
    const int wanted = arguments.whole("--mode").value_or(1);
    if (!arguments.has("--mode") && modes.size() > 1) {
      throw base::usage_error(*file, "holds " + std::to_string(modes.size()) + " modes", "say which with --mode N");
    }
    if (static_cast<std::size_t>(wanted) > modes.size()) {
      throw base::usage_error(*file, "holds " + std::to_string(modes.size()) + " modes, not " + std::to_string(wanted));
    }
    return modes[static_cast<std::size_t>(wanted) - 1];
  }
  if (!frequency || !damping || !mass) {
    throw base::usage_error("", "absorber needs a mode",
                            "give --mode-frequency, --mode-damping and --mode-mass, or --result RESULT.json --mode N");
  }
  modal::Mode mode;
  mode.frequency = estimate(*frequency, Quantity::frequency);
  mode.damping_ratio = estimate(*damping, Quantity::ratio);
  mode.modal_mass = estimate(*mass, Quantity::mass);
  mode.state = "running";
  return mode;
}

absorber::ForcingRange forcing_from(const Arguments& arguments, const modal::Mode& mode) {
  absorber::ForcingRange forcing;
  const auto frequency = arguments.range("--forcing-frequency");
  const auto speed = arguments.range("--speed");
  if (frequency && speed) throw base::usage_error("", "--forcing-frequency and --speed exclude each other");
  if (const auto name = arguments.text("--forcing")) {
    forcing.forcing = *absorber::forcing_named(*name);
  } else if (speed) {
    forcing.forcing = absorber::Forcing::unbalance;
  }
  if (frequency) {
    forcing.range_hz = *frequency;
  } else if (speed) {
    forcing.range_hz = {speed->lo / 60.0, speed->hi / 60.0};
  } else if (forcing.forcing == absorber::Forcing::random) {
    forcing.range_hz = {0.7 * mode.frequency.value, 1.4 * mode.frequency.value};
  } else {
    throw base::usage_error("", "absorber needs a forcing", "give --forcing-frequency HZ|LO:HI or --speed RPM|LO:HI");
  }
  forcing.duty_hz = arguments.number("--duty-frequency");
  return forcing;
}

std::optional<double> scaled(std::optional<double> value, double factor) {
  return value ? std::optional(*value * factor) : std::nullopt;
}

}  // namespace

int run_absorber(Session& session) {
  const Arguments& arguments = session.arguments();
  step::AbsorberRequest request;
  absorber::Request& question = request.question;
  question.mode = mode_from(arguments);
  if (question.mode.state == "stopped") request.stopped_shift = modal::StoppedShift{};
  question.forcing = forcing_from(arguments, question.mode);
  if (const auto name = arguments.text("--objective")) question.objective = *absorber::objective_named(*name);
  if (const auto before = scaled(arguments.number("--before"), 1e-3)) {
    question.before.component = base::Estimate{*before, {}, {}, Quantity::velocity};
  }
  question.before.point = question.mode.point;
  question.constraints.target = scaled(arguments.number("--target"), 1e-3);
  question.constraints.max_mass_kg = arguments.number("--max-mass");
  question.constraints.max_travel_m = scaled(arguments.number("--max-travel"), 1e-3);
  question.allowances.temperature_c = arguments.range("--temperature");
  const step::AbsorberResult result = step::size_absorber(std::move(request), session.context());
  session.print(report::text(result));
  const report::Envelope envelope = session.envelope();
  session.write({[&] { return report::json(envelope, result); }, [&] { return report::csv(result); },
                 [&] { return report::page(envelope, result); }});
  return result.refusal ? not_answered : done;
}

}  // namespace stillmass::cli
