#include "stillmass/step/runup.hpp"

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {

int run_runup(Session& session) {
  const Arguments& arguments = session.arguments();
  const std::string& file = arguments.files.front();
  const auto reader = session.open(file);
  step::RunupRequest request;
  request.part = session.part(file);
  if (const survey::SurveyRecording* entry = session.entry(file)) {
    request.pulses_per_turn = entry->pulses_per_turn;
    request.falling_edge = entry->falling_edge;
  }
  request.speed_channel = arguments.text("--speed-channel").value_or("");
  request.pulses_per_turn = arguments.whole("--pulses-per-turn").value_or(request.pulses_per_turn);
  if (arguments.has("--orders")) request.orders = arguments.numbers("--orders");
  request.max_frequency_hz = arguments.number("--max-frequency");
  const step::RunupResult result = step::runup(*reader, request, session.context());
  session.print(report::text(result));
  const report::Envelope envelope = session.envelope();
  session.write({[&] { return report::json(envelope, result); }, [&] { return report::csv(result); },
                 [&] { return report::page(envelope, result); }});
  return result.refusal ? not_answered : done;
}

}  // namespace stillmass::cli
