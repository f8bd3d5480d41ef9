#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/absorber/decision.hpp"
#include "stillmass/absorber/remedies.hpp"
#include "stillmass/absorber/specification.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/report/page.hpp"
#include "stillmass/survey/plan.hpp"
#include "stillmass/survey/survey.hpp"

namespace stillmass::report {

/// "24.63 +- 0.02 Hz": the value with its standard uncertainty to two digits, in that unit; "24.63 Hz (uncertainty not
/// known)" is never said: without u just the value.
std::string with_u(const base::Estimate& estimate, double factor, std::string_view unit);
/// In the unit people read: Hz, mm/s, um, rpm, kg, %.
std::string with_u(const base::Estimate& estimate);
/// "2.81 mm/s".
std::string velocity_text(double m_s);

std::string sentence(const absorber::Reason& reason);
std::string sentence(const absorber::Remedy& remedy);
/// Seen, likely cause, what to do: one line.
std::string sentence(const base::Finding& finding);
/// What drives the machine: "unbalance (fair): 1x at 24.63 Hz ...".
std::string cause_sentence(const base::Finding& finding);
/// At most three findings of one code, and how many more there are of each: a list that can be read.
struct Shortened {
  std::vector<base::Finding> findings;
  std::vector<std::string> more;  ///< "12 more of methods-disagree"
};
Shortened shortened(const std::vector<base::Finding>& findings);
/// " at 3.20 s", " from 3.20 to 4.50 s"; empty where there is no time or the finding's text names it.
std::string when(const base::Finding& finding);
std::string sentence(const base::Refusal& refusal);
/// What the uncertainties of the spectra hold.
std::string uncertainty_note(const step::SpectrumResult& result);
/// What an absorber's specification says, in one sentence.
std::string sentence(const absorber::Specification& specification, const std::string& point);

/// The lines that a practitioner acts on: quality, severity, cause, mode, remedy, after; each from the result alone.
std::vector<Line> lines(const survey::SurveyResult& result);
/// The answer of the survey in one sentence, and how it looks.
Line verdict(const survey::SurveyResult& result);
/// The lines as plain text, the verdict first.
std::vector<std::string> summary(const survey::SurveyResult& result);

/// The measuring plan of a survey without recordings, one step a sentence.
std::vector<std::string> sentences(const survey::Plan& plan);

/// Cautions for the work that a result asks for; they always defer to the site's rules and licensed practice.
std::vector<std::string> cautions(const survey::SurveyResult& result);
/// Those of an absorber.
std::vector<std::string> absorber_cautions();

}  // namespace stillmass::report
