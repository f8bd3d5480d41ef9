#include "stillmass/report/result_page.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/charts_signal.hpp"
#include "stillmass/report/sentences.hpp"

#include "report/sections.hpp"

namespace stillmass::report {
namespace {

Page started(const Envelope& envelope, const std::string& title, const std::string& subtitle) {
  Page page;
  page.title = title;
  page.subtitle = subtitle;
  page.facts = facts(envelope);
  return page;
}

void add(Page& page, const std::string& heading, std::vector<Block> blocks) {
  if (blocks.empty()) return;
  page.sections.push_back({heading, std::move(blocks)});
}

// Findings that are no cause of vibration: what is assumed on the way.
std::vector<base::Finding> without_causes(std::vector<base::Finding> findings) {
  std::erase_if(findings, [](const base::Finding& each) { return !each.evidence.empty(); });
  return findings;
}

std::string first_file(const Envelope& envelope) {
  return envelope.inputs.empty() ? "" : envelope.inputs.front().file.filename().string();
}

}  // namespace

Page page(const Envelope& envelope, const std::vector<step::CheckResult>& results) {
  Page out =
      started(envelope, results.size() == 1 ? first_file(envelope) : fmt::format("{} recordings", results.size()),
              "Is the recording good?");
  step::Verdict worst = step::Verdict::good;
  for (const step::CheckResult& result : results) {
    worst = std::max(worst, result.verdict);
    out.lines.push_back(
        {result.recording.file.filename().string(), std::string(step::name(result.verdict)), tone_of(result.verdict)});
    add(out, result.recording.file.filename().string(), check_blocks(result));
  }
  out.tone = tone_of(worst);
  out.verdict = worst == step::Verdict::good       ? "Good: use them."
                : worst == step::Verdict::doubtful ? "Usable with remarks."
                                                   : "Take at least one channel again.";
  out.sections.push_back(inputs_section(envelope));
  return out;
}

Page page(const Envelope& envelope, const step::SpectrumResult& result, const SpectrumView& view) {
  Page out = started(envelope, first_file(envelope), "Averaged spectra");
  const step::ChannelSpectrum* strongest = nullptr;
  for (const step::ChannelSpectrum& each : result.channels) {
    if (!each.severity_velocity) continue;
    if (strongest == nullptr || each.severity_velocity->value > strongest->severity_velocity->value) strongest = &each;
  }
  if (strongest != nullptr) {
    out.verdict =
        fmt::format("{} r.m.s. at {}", velocity_text(strongest->severity_velocity->value), strongest->channel.name);
    if (strongest->severity) {
      out.verdict +=
          fmt::format(": {} of {}", machine::text(strongest->severity->verdict), strongest->severity->limits.standard);
    }
    if (!strongest->peaks.empty()) {
      out.lines.push_back({"Strongest line", fmt::format("{}: {}", with_u(strongest->peaks.front().tone.frequency),
                                                         strongest->peaks.front().cause.text)});
      if (!result.causes.empty()) {
        out.lines.push_back({"Cause", cause_sentence(result.causes.front()), Tone::neutral});
      }
    }
  }
  if (result.speed) out.lines.push_back({"Speed", with_u(*result.speed, 60.0, "rpm")});
  std::vector<Block> level;
  std::vector<const step::ChannelSpectrum*> channels;
  for (const step::ChannelSpectrum& each : result.channels) channels.push_back(&each);
  if (auto chart = severity_chart(channels, {}, {})) level.emplace_back(std::move(*chart));
  add(out, "Levels", std::move(level));
  add(out, "What drives it", cause_blocks(result.causes));
  add(out, "How it moves", deflection_blocks(result.shapes));
  add(out, "Spectra", spectrum_blocks(result, view));
  out.sections.push_back(inputs_section(envelope));
  return out;
}

Page page(const Envelope& envelope, const step::BumpResult& result) {
  Page out = started(envelope, first_file(envelope), "Natural frequencies from a hammer test");
  out.verdict = result.refusal ? "No natural frequency: " + sentence(*result.refusal)
                               : fmt::format("{} natural frequenc{} found.", result.modes.size(),
                                             result.modes.size() == 1 ? "y" : "ies");
  out.tone = result.refusal ? Tone::caution : Tone::neutral;
  add(out, "Modes", bump_blocks(result));
  out.sections.push_back(inputs_section(envelope));
  return out;
}

Page page(const Envelope& envelope, const step::RunupResult& result) {
  Page out = started(envelope, first_file(envelope), "Run-up or coast-down");
  if (result.refusal) {
    out.verdict = "No order tracks: " + sentence(*result.refusal);
    out.tone = Tone::caution;
  } else {
    out.verdict = result.critical_speeds.empty()
                      ? "No critical speed within these speeds."
                      : fmt::format("{} peak{} of an order within these speeds.", result.critical_speeds.size(),
                                    result.critical_speeds.size() == 1 ? "" : "s");
  }
  add(out, "Orders", runup_blocks(result));
  out.sections.push_back(inputs_section(envelope));
  return out;
}

Page page(const Envelope& envelope, const step::AbsorberResult& result) {
  const std::string point = result.question.mode.point.empty() ? "the attachment point" : result.question.mode.point;
  Page out = started(envelope, "Vibration absorber", "Specification");
  if (result.specification) {
    const bool none = result.specification->recommendation == absorber::Recommendation::none;
    out.verdict = sentence(*result.specification, point);
    out.tone = none ? Tone::caution : Tone::good;
  } else {
    out.verdict = sentence(*result.refusal);
    out.tone = Tone::caution;
  }
  add(out, "Absorber", absorber_blocks(result, point, ""));
  return out;
}

Page page(const Envelope& envelope, const survey::SurveyResult& result) {
  Page out = started(envelope, result.survey.machine.name, "Vibration survey");
  const Line answer = verdict(result);
  out.verdict = answer.text;
  out.tone = answer.tone;
  out.lines = lines(result);

  for (const survey::AbsorberAim& aim : result.absorbers) {
    const survey::Point* point = result.survey.point(aim.site.point);
    add(out, "Absorber at " + aim.site.point,
        absorber_blocks(aim.result, aim.site.point, point != nullptr ? point->direction : ""));
  }

  const auto spectra_of = [&](survey::Stage stage) -> const step::SpectrumResult* {
    for (const auto& [index, spectra] : result.spectra) {
      if (result.survey.recordings[index].stage == stage && result.survey.recordings[index].running) return &spectra;
    }
    return nullptr;
  };
  const step::SpectrumResult* before = spectra_of(survey::Stage::before);
  const step::SpectrumResult* after = spectra_of(survey::Stage::after);

  std::vector<Block> severity;
  const auto loudest_before = survey::loudest(result, survey::Stage::before);
  if (auto chart = severity_chart(loudest_before, survey::loudest(result, survey::Stage::after), result.target_m_s)) {
    severity.emplace_back(std::move(*chart));
  }
  if (!result.after.empty()) {
    Table table;
    table.caption = "Achieved against predicted";
    table.header = {"point", "before", "after", "predicted", "forcing line before", "forcing line after", "target met"};
    for (const survey::AfterPoint& each : result.after) {
      table.rows.push_back({each.point, with_u(each.before, 1e3, "mm/s"), with_u(each.after, 1e3, "mm/s"),
                            each.predicted ? with_u(*each.predicted, 1e3, "mm/s") : "",
                            each.component_before ? velocity_text(each.component_before->value) : "",
                            each.component_after ? velocity_text(each.component_after->value) : "",
                            each.meets_target ? (*each.meets_target ? "yes" : "no") : ""});
    }
    severity.emplace_back(std::move(table));
  }
  add(out, "How bad it is", std::move(severity));

  add(out, "What drives it", cause_blocks(result.findings));
  if (before != nullptr) add(out, "How it moves", deflection_blocks(before->shapes));
  add(out, "How it moves, several recordings joined", deflection_blocks(result.shapes));
  std::vector<Block> cuts;
  for (const auto& [index, cut] : result.power_cuts) {
    cuts.emplace_back(Paragraph{fmt::format("{}, {}: {} ({}).", result.survey.recordings[index].written, cut.channel,
                                            cut.result.reason, rotation::name(cut.result.verdict))});
  }
  add(out, "When the power was cut", std::move(cuts));
  add(out, "What is assumed", finding_blocks(without_causes(result.findings)));
  if (before != nullptr && after != nullptr) {
    std::vector<Block> pairs;
    for (const step::ChannelSpectrum& now : before->channels) {
      const auto later =
          std::find_if(after->channels.begin(), after->channels.end(), [&](const step::ChannelSpectrum& each) {
            return each.channel.point == now.channel.point && !now.channel.point.empty();
          });
      if (later == after->channels.end() || now.shown.quantity != later->shown.quantity) continue;
      pairs.emplace_back(before_after_chart(now, *later, std::min(200.0, now.shown.rate_hz / 2.0)));
    }
    add(out, "Before and after", std::move(pairs));
  }
  for (const step::BumpResult& bump : result.bumps) add(out, "Hammer test", bump_blocks(bump));
  for (const auto& [index, spectra] : result.spectra) {
    add(out,
        fmt::format("Spectra: {} ({})", result.survey.recordings[index].written,
                    survey::name(result.survey.recordings[index].stage)),
        spectrum_blocks(spectra, {}));
  }
  for (const auto& [index, runup] : result.runups) {
    add(out, fmt::format("Run-up: {}", result.survey.recordings[index].written), runup_blocks(runup));
  }
  std::vector<Block> calibrated;
  if (!result.calibrations.channels.empty()) {
    Table table;
    table.header = {"recording", "channel", "measured", "factor times", "applied"};
    for (const survey::ChannelCalibration& each : result.calibrations.channels) {
      const base::Unit unit = base::si_unit(each.result.measured.quantity);
      table.rows.push_back({result.survey.recordings[each.recording].written, each.channel,
                            with_u(each.result.measured, 1.0, unit.name), with_u(each.result.correction, 1.0, ""),
                            each.applied ? "yes" : "no: " + each.result.suspicion});
      if (!each.applied) calibrated.emplace_back(Caution{Tone::caution, "", each.text + "."});
    }
    calibrated.insert(calibrated.begin(), std::move(table));
  }
  add(out, "Calibration", std::move(calibrated));
  for (const auto& [index, check] : result.quality) {
    add(out, fmt::format("Recording: {} ({})", result.survey.recordings[index].written, step::name(check.verdict)),
        check_blocks(check));
  }
  if (!result.refusals.empty()) {
    std::vector<Block> open;
    for (const base::Refusal& each : result.refusals)
      open.emplace_back(Caution{Tone::caution, "", sentence(each) + "."});
    add(out, "Not answered", std::move(open));
  }
  MachineSketch sketch;
  sketch.title = result.survey.machine.name;
  for (const survey::Point& point : result.survey.points) {
    SketchPoint place{point.name, point.position_m, point.direction, "", false};
    for (const step::ChannelSpectrum* each : loudest_before) {
      if (each->channel.point == point.name) place.remark = velocity_text(each->severity_velocity->value);
    }
    place.absorber = std::any_of(result.survey.absorbers.begin(), result.survey.absorbers.end(),
                                 [&](const survey::AbsorberSite& site) { return site.point == point.name; });
    sketch.points.push_back(std::move(place));
  }
  std::vector<Block> points;
  if (!sketch.points.empty()) points.emplace_back(std::move(sketch));
  add(out, "Measuring points", std::move(points));
  std::vector<Block> care;
  care.emplace_back(Bullets{cautions(result), false});
  add(out, "Cautions", std::move(care));
  out.sections.push_back(inputs_section(envelope));
  return out;
}

}  // namespace stillmass::report
