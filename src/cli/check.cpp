#include "stillmass/step/check.hpp"

#include <algorithm>

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {

int run_check(Session& session) {
  std::vector<step::CheckResult> results;
  int code = done;
  for (const std::string& file : session.arguments().files) {
    try {
      const auto reader = session.open(file);
      step::CheckRequest request;
      request.part = session.part(file);
      if (const survey::SurveyRecording* entry = session.entry(file)) {
        request.pulses_per_turn = entry->pulses_per_turn;
        request.falling_edge = entry->falling_edge;
      }
      if (session.survey()) request.line_frequency_hz = session.survey()->machine.line_frequency_hz;
      results.push_back(step::check(*reader, request, session.context()));
      session.print((results.size() > 1 ? "\n" : "") + report::text(results.back()));
    } catch (const base::Error& error) {
      // A batch goes on past a bad file; its exit code says so.
      if (session.arguments().files.size() == 1) throw;
      session.warn(error.what());
      code = std::max(code, exit_code(error.kind));
    }
  }
  const report::Envelope envelope = session.envelope();
  session.write({[&] { return report::json(envelope, results); }, [&] { return report::csv(results); },
                 [&] { return report::page(envelope, results); }});
  return code;
}

}  // namespace stillmass::cli
