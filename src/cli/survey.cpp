#include "stillmass/survey/survey.hpp"

#include <filesystem>

#include "stillmass/base/digest.hpp"
#include "stillmass/base/output.hpp"
#include "stillmass/report/page.hpp"
#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/result_page.hpp"
#include "stillmass/report/terminal.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {
namespace {

namespace fs = std::filesystem;

fs::path report_folder(const Arguments& arguments, const fs::path& survey) {
  if (const auto folder = arguments.text("--out")) return *folder;
  return survey.parent_path() / (survey.stem().string() + "-report");
}

report::Envelope envelope_of(const Session& session, const survey::SurveyResult& result) {
  report::Envelope envelope = session.envelope();
  for (const auto& [index, check] : result.quality) {
    envelope.inputs.push_back(check.recording);
    envelope.hashes.push_back(base::sha256_of_file(check.recording.file));
    envelope.warnings.insert(envelope.warnings.end(), check.recording.findings.begin(), check.recording.findings.end());
  }
  return envelope;
}

}  // namespace

int run_survey(Session& session) {
  const fs::path file = session.arguments().files.front();
  const survey::Survey survey = survey::read_survey(file);
  base::OutputFolder folder(report_folder(session.arguments(), file), {"report.html", "result.json"});
  const survey::SurveyResult result = survey::run(survey, session.context());
  const report::Envelope envelope = envelope_of(session, result);
  for (const report::NamedText& csv : report::csv(result)) folder.write("csv/" + csv.name, csv.text);
  folder.write("report.html", report::html(report::page(envelope, result)));
  const std::string json = report::json(envelope, result);
  folder.write("result.json", json);
  folder.commit();
  session.print(report::text(result));
  session.print("\nReport: " + (folder.folder() / "report.html").string() + "\n");
  session.write_json(json);
  return result.refusals.empty() ? done : not_answered;
}

}  // namespace stillmass::cli
