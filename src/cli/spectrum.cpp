#include "stillmass/step/spectrum.hpp"

#include <algorithm>
#include <memory>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"
#include "stillmass/survey/survey.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"
#include "cli/values.hpp"

namespace stillmass::cli {
namespace {

// A speed given by hand; a range is where it lies.
void take_speed(const std::string& text, step::SpectrumRequest& request) {
  constexpr double per_minute = 1.0 / 60.0;
  request.runs_steadily = true;
  if (const auto range = parse_range(text)) {
    if (!request.site.machine) request.site.machine = machine::Machine{};
    request.site.machine->speed_hz = base::Interval{range->lo * per_minute, range->hi * per_minute};
    request.speed_hz.reset();
  } else {
    request.speed_hz = *base::parse_number(text) * per_minute;
  }
}

// Options that contradict each other or do nothing beside each other.
void check_together(const Arguments& arguments) {
  if (arguments.has("--averages") && arguments.text("--average") != "exponential") {
    throw base::usage_error("--averages", "goes with --average exponential only", "leave it out");
  }
  if (arguments.has("--lines") && arguments.has("--resolution")) {
    throw base::usage_error("--lines", "and --resolution both say how far lines are apart", "give one of them");
  }
}

step::SpectrumRequest request_from(const Session& session, const std::string& file) {
  const Arguments& arguments = session.arguments();
  step::SpectrumRequest request;
  request.part = session.part(file);
  if (const auto name = arguments.text("--window")) request.options.window = *spectral::window_named(*name);
  if (const auto overlap = arguments.number("--overlap")) request.options.overlap = *overlap;
  if (const auto resolution = arguments.number("--resolution")) request.options.resolution_hz = *resolution;
  if (const auto name = arguments.text("--average")) {
    request.options.averaging = spectral::averaging_named(*name).value_or(spectral::Averaging::mean);
  }
  if (const auto averages = arguments.whole("--averages")) request.options.exponential_averages = *averages;
  if (const auto lines = arguments.whole("--lines")) {
    request.options.lines = static_cast<std::size_t>(*lines);
    request.options.lines_to_hz = arguments.number("--max-frequency").value_or(0.0);
  }
  if (const auto quantity = arguments.text("--quantity")) request.quantity = base::quantity_named(*quantity);
  if (const auto detector = arguments.text("--detector")) request.detector = *base::detector_named(*detector);
  request.band_hz = arguments.range("--band");
  request.max_frequency_hz = arguments.number("--max-frequency");
  if (const auto peaks = arguments.whole("--peaks")) request.peaks = static_cast<std::size_t>(*peaks);
  if (session.survey()) {
    request.site = survey::site_of(*session.survey());
    if (const survey::SurveyRecording* entry = session.entry(file)) {
      request.speed_hz = entry->speed_hz;
      request.runs_steadily = entry->kind == survey::Kind::steady && entry->running;
    }
  }
  if (const auto speed = arguments.text("--speed")) take_speed(*speed, request);
  request.zoom_hz = arguments.range("--zoom");
  if (const auto envelope = arguments.text("--envelope")) {
    request.envelope = step::EnvelopeRequest{*envelope == "auto" ? std::nullopt : parse_range(*envelope)};
  }
  if (const auto reference = arguments.text("--reference")) request.reference = *reference;
  if (arguments.text("--average") == "synchronous") {
    rotation::SynchronousSettings settings;
    if (request.part.from_s || request.part.to_s) {
      settings.time_s = base::Interval{request.part.from_s.value_or(0.0), request.part.to_s.value_or(1e12)};
    }
    if (const survey::SurveyRecording* entry = session.survey() ? session.entry(file) : nullptr) {
      settings.tacho.pulses_per_turn = entry->pulses_per_turn;
      settings.tacho.edge = entry->falling_edge ? rotation::Edge::falling : rotation::Edge::rising;
    }
    if (const auto pulses = arguments.whole("--pulses-per-turn")) settings.tacho.pulses_per_turn = *pulses;
    request.synchronous = settings;
  }
  return request;
}

// The recording of the stopped machine: as named, else that of the survey.
std::string background_file(const Session& session, const std::string& file) {
  if (const auto named = session.arguments().text("--background")) {
    const survey::SurveyRecording* known = session.survey() ? session.entry(*named) : nullptr;
    if (known != nullptr && known->kind != survey::Kind::background) {
      throw base::usage_error(*named, "is not of kind \"background\" in the survey file",
                              "name a recording of the stopped machine");
    }
    return *named;
  }
  if (!session.survey()) return {};
  const survey::SurveyRecording* entry = session.entry(file);
  if (entry == nullptr || entry->kind != survey::Kind::steady || !entry->running) return {};
  const survey::SurveyRecording* stopped_machine = survey::background_of(*session.survey(), entry->stage);
  return stopped_machine != nullptr ? stopped_machine->file.string() : std::string();
}

}  // namespace

int run_spectrum(Session& session) {
  check_together(session.arguments());
  const std::string& file = session.arguments().files.front();
  const auto reader = session.open(file);
  step::SpectrumRequest request = request_from(session, file);
  std::unique_ptr<recording::Reader> background;
  if (const std::string other = background_file(session, file); !other.empty()) {
    background = session.open(other);
    request.background = {background.get(),
                          session.arguments().has("--background") ? step::Part{} : session.part(other)};
  }
  const step::SpectrumResult result = step::spectrum(*reader, request, session.context());
  const report::SpectrumView view{session.arguments().has("--density"), session.arguments().has("--third-octaves")};
  session.print(report::text(result, view));
  const report::Envelope envelope = session.envelope();
  session.write({[&] { return report::json(envelope, result); }, [&] { return report::csv(result); },
                 [&] { return report::page(envelope, result, view); }});
  const bool is_answered = session.arguments().text("--average") != "synchronous" ||
                           std::any_of(result.channels.begin(), result.channels.end(),
                                       [](const auto& each) { return each.synchronous.has_value(); });
  return is_answered ? done : not_answered;
}

}  // namespace stillmass::cli
