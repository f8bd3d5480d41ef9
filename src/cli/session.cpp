#include "cli/session.hpp"

#include <algorithm>
#include <cstdio>
#include <filesystem>
#include <thread>
#include <utility>

#include <unistd.h>

#include "stillmass/base/error.hpp"

namespace stillmass::cli {
namespace {

namespace fs = std::filesystem;

// A file that would be refused later is refused before the long work.
void check_writable(const std::string& file) {
  std::error_code ignored;
  if (fs::exists(fs::symlink_status(file, ignored))) {
    throw base::file_error(file, "exists already", "choose another name or remove it");
  }
  const fs::path folder = fs::path(file).has_parent_path() ? fs::path(file).parent_path() : fs::path(".");
  if (!fs::is_directory(folder, ignored))
    throw base::file_error(file, "cannot be written: its folder is not there", "make the folder first");
  if (::access(folder.c_str(), W_OK) != 0)
    throw base::file_error(file, "cannot be written: its folder is closed to writing", "choose another folder");
}

// What the options say of text files goes over what the survey file says.
void take_text_options(const Arguments& arguments, recording::TextOptions& text) {
  if (const auto word = arguments.text("--separator")) text.separator = recording::separator_named(*word);
  if (const auto word = arguments.text("--decimal")) text.decimal = recording::decimal_named(*word);
  if (const auto word = arguments.text("--time-unit")) text.time_unit_s = recording::time_unit_named(*word);
  if (const auto column = arguments.whole("--time-column")) text.time_column = column;
  if (const auto word = arguments.text("--dates")) text.day_first = recording::day_first_named(*word);
}

void put(std::FILE* stream, const std::string& text) {
  if (std::fwrite(text.data(), 1, text.size(), stream) != text.size() || std::fflush(stream) != 0) {
    throw base::file_error("standard output", "cannot be written");
  }
}

}  // namespace

Session::Session(Arguments arguments, std::stop_token stop)
    : arguments_(std::move(arguments)), stop_(std::move(stop)), bar_(!arguments_.has("--quiet")) {
  json_to_output_ = arguments_.text("--json") == "-";
  if (const auto file = arguments_.text("--survey")) survey_ = survey::read_survey(*file);
  for (const char* option : {"--json", "--html", "--truth"}) {
    const auto file = arguments_.text(option);
    if (file && !(json_to_output_ && std::string_view(option) == "--json")) check_writable(*file);
  }
  if (const auto folder = arguments_.text("--csv")) {
    csv_folder_ = std::make_unique<base::OutputFolder>(*folder, std::vector<std::string>{});
  }
}

base::Context Session::context() {
  base::Context context;
  context.stop = stop_;
  context.threads = std::max(1U, std::thread::hardware_concurrency());
  if (const auto threads = arguments_.whole("--threads"))
    context.threads = static_cast<unsigned>(std::min(*threads, 256));
  context.progress = [this](std::string_view what, double fraction) { bar_.show(what, fraction); };
  return context;
}

void Session::print(const std::string& text) {
  bar_.clear();
  if (arguments_.has("--quiet")) return;
  put(json_to_output_ ? stderr : stdout, text);
}

void Session::warn(const std::string& text) {
  bar_.clear();
  std::fprintf(stderr, "stillmass: %s\n", text.c_str());
}

report::Envelope Session::envelope() const {
  report::Envelope envelope;
  envelope.command = arguments_.command;
  envelope.settings = arguments_.given();
  envelope.inputs = inputs_;
  for (const recording::Recording& recording : inputs_) {
    envelope.warnings.insert(envelope.warnings.end(), recording.findings.begin(), recording.findings.end());
  }
  return envelope;
}

void Session::write(const Outputs& outputs) {
  bar_.clear();
  if (csv_folder_) {
    for (const report::NamedText& file : outputs.csv()) csv_folder_->write(file.name, file.text);
    csv_folder_->commit();
  }
  if (const auto file = arguments_.text("--html")) base::write_whole(*file, report::html(outputs.page()));
  if (arguments_.has("--json")) write_json(outputs.json());
}

void Session::write_json(const std::string& json) {
  if (json_to_output_) {
    put(stdout, json);
  } else if (const auto file = arguments_.text("--json")) {
    base::write_whole(*file, json);
  }
}

const survey::SurveyRecording* Session::entry(const std::string& file) const {
  if (!survey_) return nullptr;
  std::error_code ignored;
  for (const survey::SurveyRecording& recording : survey_->recordings) {
    if (fs::equivalent(recording.file, file, ignored)) return &recording;
  }
  if (!fs::exists(file, ignored)) return nullptr;
  throw base::usage_error(file, "the survey file does not list this recording",
                          "add it there, or name its channels with --channel");
}

void Session::calibrate() {
  if (!survey_ || is_calibrated_) return;
  is_calibrated_ = true;
  const survey::Calibrations calibrations = survey::apply_calibrations(*survey_, context());
  for (const base::Finding& finding : calibrations.findings) warn(finding.text);
  for (const base::Refusal& refusal : calibrations.refusals) warn(refusal.seen);
}

std::unique_ptr<recording::Reader> Session::open(const std::string& file) {
  calibrate();
  recording::OpenOptions options;
  if (const survey::SurveyRecording* known = entry(file)) options = known->open;
  if (const auto rate = arguments_.number("--rate")) options.rate_hz = rate;
  take_text_options(arguments_, options.text);
  for (const std::string& text : arguments_.all("--channel")) {
    const recording::ChannelSetting setting = parse_channel(text);
    std::erase_if(options.channels, [&](const recording::ChannelSetting& each) { return each.index == setting.index; });
    options.channels.push_back(setting);
  }
  auto reader = recording::open(file, options, context());
  inputs_.push_back(reader->recording());
  return reader;
}

step::Part Session::part(const std::string& file) const {
  step::Part part;
  if (const survey::SurveyRecording* known = entry(file); known != nullptr && known->part_s) {
    part = {known->part_s->lo, known->part_s->hi};
  }
  if (const auto from = arguments_.number("--from")) part.from_s = from;
  if (const auto to = arguments_.number("--to")) part.to_s = to;
  return part;
}

}  // namespace stillmass::cli
