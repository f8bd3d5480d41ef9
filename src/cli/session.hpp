#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <stop_token>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/output.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/report/envelope.hpp"
#include "stillmass/report/page.hpp"
#include "stillmass/report/result_csv.hpp"
#include "stillmass/step/part.hpp"
#include "stillmass/survey/calibrations.hpp"
#include "stillmass/survey/survey_file.hpp"

#include "cli/arguments.hpp"
#include "cli/progress_bar.hpp"

namespace stillmass::cli {

/// What every command needs around its own work: the arguments, the context, where text goes, what is written.
class Session {
 public:
  /// Checks at once that the files asked for can be written. Throws `Error`.
  Session(Arguments arguments, std::stop_token stop);

  const Arguments& arguments() const { return arguments_; }
  base::Context context();
  /// Human text: standard output, or standard error where the JSON goes to standard output; nothing with --quiet.
  void print(const std::string& text);
  void warn(const std::string& text);

  report::Envelope envelope() const;
  /// A result in every form it can be written in; each is made only where it was asked for.
  struct Outputs {
    std::function<std::string()> json;
    std::function<std::vector<report::NamedText>()> csv;
    std::function<report::Page()> page;
  };
  /// Writes what was asked for: CSV files, the page, the JSON last.
  void write(const Outputs& outputs);
  void write_json(const std::string& json);

  /// The survey file of --survey, if given.
  const std::optional<survey::Survey>& survey() const { return survey_; }
  /// What the survey file says of that recording; null where there is none. Throws `Error` (usage) where the survey
  /// file does not list it.
  const survey::SurveyRecording* entry(const std::string& file) const;
  /// Opens a recording with what the survey file (its calibrations too) and the options say of it.
  std::unique_ptr<recording::Reader> open(const std::string& file);
  step::Part part(const std::string& file) const;

 private:
  void calibrate();

  Arguments arguments_;
  std::stop_token stop_;
  ProgressBar bar_;
  std::optional<survey::Survey> survey_;
  std::unique_ptr<base::OutputFolder> csv_folder_;
  std::vector<recording::Recording> inputs_;
  bool json_to_output_ = false;
  bool is_calibrated_ = false;
};

}  // namespace stillmass::cli
