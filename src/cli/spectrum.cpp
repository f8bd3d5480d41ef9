#include "stillmass/step/spectrum.hpp"

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"
#include "stillmass/survey/survey.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {
namespace {

step::SpectrumRequest request_from(const Session& session, const std::string& file) {
  const Arguments& arguments = session.arguments();
  step::SpectrumRequest request;
  request.part = session.part(file);
  if (const auto name = arguments.text("--window")) request.options.window = *spectral::window_named(*name);
  if (const auto overlap = arguments.number("--overlap")) request.options.overlap = *overlap;
  if (const auto resolution = arguments.number("--resolution")) request.options.resolution_hz = *resolution;
  if (arguments.text("--average") == "peak-hold") request.options.averaging = spectral::Averaging::peak_hold;
  if (const auto quantity = arguments.text("--quantity")) request.quantity = base::quantity_named(*quantity);
  if (const auto detector = arguments.text("--detector")) request.detector = *base::detector_named(*detector);
  request.band_hz = arguments.range("--band");
  request.max_frequency_hz = arguments.number("--max-frequency");
  if (const auto peaks = arguments.whole("--peaks")) request.peaks = static_cast<std::size_t>(*peaks);
  if (session.survey()) {
    request.site = survey::site_of(*session.survey());
    if (const survey::SurveyRecording* entry = session.entry(file)) request.speed_hz = entry->speed_hz;
  }
  return request;
}

}  // namespace

int run_spectrum(Session& session) {
  const std::string& file = session.arguments().files.front();
  const auto reader = session.open(file);
  const step::SpectrumResult result = step::spectrum(*reader, request_from(session, file), session.context());
  const bool density = session.arguments().has("--density");
  session.print(report::text(result, density));
  const report::Envelope envelope = session.envelope();
  session.write(report::json(envelope, result), report::csv(result), report::page(envelope, result, density));
  return done;
}

}  // namespace stillmass::cli
