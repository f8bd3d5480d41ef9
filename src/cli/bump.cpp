#include "stillmass/step/bump.hpp"

#include <memory>
#include <vector>

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {

int run_bump(Session& session) {
  const Arguments& arguments = session.arguments();
  std::vector<std::unique_ptr<recording::Reader>> held;
  std::vector<recording::Reader*> readers;
  step::BumpRequest request;
  for (const std::string& file : arguments.files) {
    held.push_back(session.open(file));
    readers.push_back(held.back().get());
    if (const survey::SurveyRecording* entry = session.entry(file))
      request.state = entry->running ? "running" : "stopped";
  }
  request.part = session.part(arguments.files.front());
  request.driving_point = arguments.text("--driving-point").value_or("");
  request.band_hz = arguments.range("--band");
  request.max_frequency_hz = arguments.number("--max-frequency");
  for (const std::string& text : arguments.all("--added-mass")) {
    const AddedMass added = *parse_added_mass(text);
    held.push_back(session.open(added.file));
    request.added_masses.push_back({added.kg, held.back().get()});
  }
  const step::BumpResult result = step::bump(readers, request, session.context());
  session.print(report::text(result));
  const report::Envelope envelope = session.envelope();
  session.write({[&] { return report::json(envelope, result); }, [&] { return report::csv(result); },
                 [&] { return report::page(envelope, result); }});
  return result.refusal ? not_answered : done;
}

}  // namespace stillmass::cli
