#include "report/sections.hpp"

#include <algorithm>
#include <array>
#include <set>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/base/version.hpp"
#include "stillmass/report/charts_absorber.hpp"
#include "stillmass/report/charts_modes.hpp"
#include "stillmass/report/charts_rotation.hpp"
#include "stillmass/report/charts_signal.hpp"
#include "stillmass/report/sentences.hpp"

namespace stillmass::report {
namespace {

using base::rounded;

std::string si_text(std::optional<double> si, const base::Unit& unit) {
  if (!si) return "";
  return rounded(*si / unit.to_si) + " " + std::string(unit.name);
}

void put(std::vector<Block>& blocks, std::optional<Chart> chart) {
  if (chart) blocks.emplace_back(std::move(*chart));
}

Caution refused(const base::Refusal& refusal) { return {Tone::caution, "Not answered", sentence(refusal)}; }

SpecSheet sheet(const step::AbsorberResult& result, const std::string& point, const std::string& direction) {
  const absorber::Specification& found = *result.specification;
  const absorber::AbsorberData& data = *found.absorber;
  const bool damped = found.recommendation == absorber::Recommendation::damped;
  SpecSheet out;
  out.title = "Absorber at " + point + (direction.empty() ? "" : ", " + direction);
  out.purpose = damped ? "A damped absorber for a band of forcing frequencies."
                       : "An undamped absorber, tuned to one forcing frequency.";
  out.rows = {
      {"Moving mass", rounded(data.mass_kg, 4) + " kg", "+-1 %", "weigh with clamps and screws"},
      {"Frequency on a clamp", fmt::format("{:.2f} Hz", data.frequency_hz),
       fmt::format("+-{:.2f} Hz", 2.0 * result.question.allowances.tuning_u * data.frequency_hz),
       "tap and read the ring-down"},
      {"Stiffness", rounded(data.stiffness, 4) + " N/m", "", "follows from mass and frequency"},
      {"Damping ratio", rounded(data.damping_ratio, 2), damped ? "+-15 %" : "or less",
       damped ? fmt::format("damper of {} N s/m", rounded(data.damping_constant)) : "no rubber, no rubbing parts"},
  };
  if (found.predicted) {
    out.rows.push_back(
        {"Travel, peak", fmt::format("{:.2f} mm", found.predicted->travel_m.value * 1e3), "",
         fmt::format("leave {:.1f} mm free either way", 1.5 * found.predicted->travel_worst_m * 1e3 + 1.0)});
  }
  if (found.passing) {
    const double passing = found.passing->passing_m.value_or(found.passing->steady_m);
    out.rows.push_back(
        {"Travel at start and stop", fmt::format("{:.2f} mm", passing * 1e3), "", "estimate for one passage"});
  }
  if (!found.blades.empty()) {
    const absorber::BladeOption& blade = found.blades.front();
    BladeDrawing drawing;
    drawing.free_length_m = blade.blade.length_m;
    drawing.width_m = blade.blade.width_m;
    drawing.thickness_m = blade.blade.thickness_m;
    drawing.tip_mass_kg = blade.tip_mass_kg;
    drawing.blades = blade.count;
    drawing.direction = direction;
    drawing.material = blade.material;
    if (found.predicted) drawing.travel_m = 1.5 * found.predicted->travel_worst_m;
    if (!found.tuning.empty()) {
      drawing.adjust_m = 0.5 * (found.tuning.front().free_length_m - found.tuning.back().free_length_m);
    }
    if (damped) drawing.damper = fmt::format("damper, {} N s/m", rounded(data.damping_constant));
    out.rows.push_back(
        {"Blade",
         fmt::format("{} of {:.0f} x {:.0f} mm, free length {:.1f} mm", blade.count, blade.blade.width_m * 1e3,
                     blade.blade.thickness_m * 1e3, blade.blade.length_m * 1e3),
         "", blade.material});
    out.rows.push_back({"Root stress at that travel", rounded(blade.stress_pa * 1e-6) + " MPa", "",
                        fmt::format("endurance factor {}", rounded(blade.endurance_factor, 2))});
    out.steps = {
        "Clamp the blade on a stiff bench (a vice on a steel table) and tap the mass; read its frequency from the "
        "ring-down.",
        fmt::format("Move the mass or the clamp: 1 mm of free length is {} Hz. Shorter is higher.",
                    rounded(std::abs(blade.frequency_per_m) * 1e-3, 2)),
        fmt::format("Stop at {:.2f} Hz, lock it, tap again.", data.frequency_hz),
        "Fit it to the stopped, locked-out machine; the clamp must be stiff and sit at the point in the direction "
        "given.",
        "Run the machine at its duty, record the point and compare with the prediction; then fine-tune.",
    };
  }
  out.notes = absorber_cautions();
  return out;
}

Table prediction_table(const absorber::Specification& found) {
  Table table;
  table.caption = "What remains";
  table.header = {"point",
                  "before",
                  "after, worst over forcing",
                  "after, at duty",
                  "95 % of cases below",
                  "out of reach",
                  "chance to meet target"};
  const auto add = [&](const absorber::Predicted& p) {
    table.rows.push_back(
        {p.point, velocity_text(p.before.value), with_u(p.after, 1e3, "mm/s"), with_u(p.at_duty, 1e3, "mm/s"),
         velocity_text(p.worst_case), velocity_text(p.outside_model),
         p.probability_meets_target ? fmt::format("{:.0f} %", std::floor(*p.probability_meets_target * 100)) : ""});
  };
  if (found.predicted) add(*found.predicted);
  for (const absorber::Predicted& other : found.others) add(other);
  table.notes = {
      "Broad-band r.m.s. velocity. Out of reach: other lines, directions and modes, carried over unreduced."};
  return table;
}

Table remedy_table(const absorber::Specification& found) {
  Table table;
  table.caption = "Other ways to bring the forcing line down";
  table.header = {"remedy", "forcing line after"};
  for (const absorber::Remedy& remedy : found.remedies) {
    table.rows.push_back({sentence(remedy), velocity_text(remedy.component_rms)});
  }
  table.notes = {"By the model of one mode; what else moves with it is not counted."};
  return table;
}

Table blade_table(const absorber::Specification& found) {
  Table table;
  table.caption = "Blades that give this frequency";
  table.header = {"blades",          "free length mm",   "width mm",  "thickness mm", "tip mass each kg",
                  "root stress MPa", "endurance factor", "Hz per mm", "next mode Hz", "material"};
  for (const absorber::BladeOption& blade : found.blades) {
    table.rows.push_back({std::to_string(blade.count), fmt::format("{:.1f}", blade.blade.length_m * 1e3),
                          fmt::format("{:.0f}", blade.blade.width_m * 1e3),
                          fmt::format("{:.1f}", blade.blade.thickness_m * 1e3), rounded(blade.tip_mass_kg),
                          rounded(blade.stress_pa * 1e-6), rounded(blade.endurance_factor, 2),
                          rounded(blade.frequency_per_m * 1e-3, 2), rounded(blade.second_mode_hz), blade.material});
  }
  return table;
}

}  // namespace

Tone tone_of(step::Verdict verdict) {
  switch (verdict) {
    case step::Verdict::good:
      return Tone::good;
    case step::Verdict::doubtful:
      return Tone::caution;
    case step::Verdict::unusable:
      return Tone::bad;
  }
  return Tone::neutral;
}

std::vector<Block> finding_blocks(const std::vector<base::Finding>& findings) {
  std::vector<Block> blocks;
  const Shortened few = shortened(findings);
  for (const base::Finding& each : few.findings) {
    const base::CodeText& code = base::text(each.code);
    std::string text = each.text.empty() ? std::string(code.seen) : each.text;
    text += when(each);
    text += fmt::format(". Likely: {}. Next: {}.", code.likely_cause, code.next_step);
    for (std::size_t i = 0; i < each.evidence.size(); ++i) {
      text += (i == 0 ? " Seen: " : "; ") + each.evidence[i] + (i + 1 == each.evidence.size() ? "." : "");
    }
    blocks.emplace_back(Caution{each.strength == base::Strength::weak ? Tone::neutral : Tone::caution,
                                each.channel.empty() ? "" : each.channel, text});
  }
  for (const std::string& more : few.more)
    blocks.emplace_back(Paragraph{"And " + more + "; the JSON result has them all."});
  return blocks;
}

Table mode_table(const std::vector<modal::Mode>& modes) {
  Table table;
  table.caption = "Natural frequencies";
  table.header = {"mode", "natural frequency", "damping ratio", "modal mass", "point", "machine", "other methods"};
  std::size_t number = 0;
  for (const modal::Mode& mode : modes) {
    std::string others;
    for (std::size_t i = 1; i < mode.methods.size(); ++i) {
      const modal::MethodResult& method = mode.methods[i];
      others += (others.empty() ? "" : "; ") + method.name + ": " + with_u(method.frequency) + ", " +
                with_u(method.damping_ratio);
    }
    table.rows.push_back({std::to_string(++number), with_u(mode.frequency), with_u(mode.damping_ratio),
                          mode.modal_mass ? with_u(*mode.modal_mass) : "", mode.point, mode.state, others});
  }
  return table;
}

std::vector<Block> check_blocks(const step::CheckResult& result) {
  std::vector<Block> blocks;
  Table table;
  table.header = {"channel", "verdict", "r.m.s.", "peak", "crest factor", "findings"};
  std::vector<base::Finding> all = result.findings;
  for (const step::ChannelCheck& each : result.channels) {
    std::string codes;
    for (const base::Finding& finding : each.findings) {
      codes += (codes.empty() ? "" : ", ") + std::string(base::text(finding.code).name);
      all.push_back(finding);
    }
    table.rows.push_back({each.channel.name, std::string(step::name(each.verdict)),
                          si_text(each.quality.rms, each.channel.unit), si_text(each.quality.peak, each.channel.unit),
                          each.quality.crest_factor ? rounded(*each.quality.crest_factor, 2) : "", codes});
  }
  blocks.emplace_back(std::move(table));
  for (Block& block : finding_blocks(all)) blocks.push_back(std::move(block));
  Chart overview = overview_chart(result);
  if (!overview.panels.empty()) blocks.emplace_back(std::move(overview));
  return blocks;
}

std::vector<Block> bump_blocks(const step::BumpResult& result) {
  std::vector<Block> blocks;
  if (result.refusal) {
    blocks.emplace_back(refused(*result.refusal));
  } else {
    blocks.emplace_back(mode_table(result.modes));
  }
  if (result.impact) {
    for (std::size_t i = 0; i < result.impact->responses.size(); ++i) put(blocks, response_chart(result, i));
  }
  put(blocks, ring_down_chart(result));
  Table hits;
  hits.header = {"file", "time", result.ring_down ? "peak" : "peak force", "used", "why not"};
  for (const step::FileHit& each : result.hits) {
    hits.rows.push_back({each.file, fmt::format("{:.2f} s", each.hit.time_s),
                         rounded(each.hit.peak) + (result.impact ? " N" : ""), each.hit.used ? "yes" : "no",
                         each.hit.used ? "" : fmt::format("{} ({})", modal::name(each.hit.verdict), each.hit.reason)});
  }
  Details details;
  details.summary = fmt::format("{} blows", result.hits.size());
  details.blocks.emplace_back(std::move(hits));
  blocks.emplace_back(std::move(details));
  for (Block& block : finding_blocks(result.findings)) blocks.push_back(std::move(block));
  return blocks;
}

std::vector<Block> runup_blocks(const step::RunupResult& result) {
  std::vector<Block> blocks;
  if (result.refusal) {
    blocks.emplace_back(refused(*result.refusal));
    return blocks;
  }
  put(blocks, speed_chart(result));
  std::set<std::string> seen;
  for (const rotation::OrderTrack& track : result.tracks) {
    if (track.value.empty() || !seen.insert(track.channel).second) continue;
    blocks.emplace_back(order_chart(result, track.channel));
  }
  if (!result.runup->waterfalls.empty()) put(blocks, waterfall_chart(result, result.runup->waterfalls.front().channel));
  if (!result.critical_speeds.empty()) {
    Table table;
    table.caption = "Critical speeds";
    table.header = {"critical speed", "highest at", "order", "channel", "amplification factor", "natural frequency"};
    for (const step::CriticalSpeedFound& each : result.critical_speeds) {
      table.rows.push_back({with_u(each.speed, 60.0, "rpm"),
                            each.peak_speed_hz ? fmt::format("{:.0f} rpm", *each.peak_speed_hz * 60.0) : "",
                            base::plain(each.order) + "x", each.channel,
                            each.amplification_factor ? rounded(*each.amplification_factor) : "",
                            each.mode ? with_u(each.mode->frequency) : ""});
    }
    blocks.emplace_back(std::move(table));
  }
  for (Block& block : finding_blocks(result.findings)) blocks.push_back(std::move(block));
  return blocks;
}

std::vector<Block> absorber_blocks(const step::AbsorberResult& result, const std::string& point,
                                   const std::string& direction) {
  std::vector<Block> blocks;
  if (result.refusal) {
    blocks.emplace_back(refused(*result.refusal));
    return blocks;
  }
  const absorber::Specification& found = *result.specification;
  blocks.emplace_back(Paragraph{"Recommendation: " + std::string(absorber::name(found.recommendation)) + ". " +
                                sentence(found.reason) + "."});
  for (const absorber::Reason& note : found.notes)
    blocks.emplace_back(Caution{Tone::caution, "", sentence(note) + "."});
  if (found.absorber) blocks.emplace_back(sheet(result, point, direction));
  put(blocks, absorber_chart(result));
  if (found.predicted) blocks.emplace_back(prediction_table(found));
  put(blocks, tuning_chart(result));
  if (!found.remedies.empty()) blocks.emplace_back(remedy_table(found));
  if (found.blades.size() > 1) {
    Details details;
    details.summary = "Other blades";
    details.blocks.emplace_back(blade_table(found));
    blocks.emplace_back(std::move(details));
  }
  if (!found.drivers.empty()) {
    Table table;
    table.caption = "What makes the prediction uncertain";
    table.header = {"input", "share of the spread"};
    for (const numeric::Driver& driver : found.drivers) {
      table.rows.push_back({driver.input, fmt::format("{:.0f} %", driver.share * 100)});
    }
    Details details;
    details.summary = "What makes the prediction uncertain";
    details.blocks.emplace_back(std::move(table));
    blocks.emplace_back(std::move(details));
  }
  for (Block& block : finding_blocks(result.findings)) blocks.push_back(std::move(block));
  return blocks;
}

Section inputs_section(const Envelope& envelope) {
  Section section;
  section.heading = "Inputs";
  Table table;
  table.header = {"file", "format", "rate", "duration", "channels"};
  if (!envelope.hashes.empty()) table.header.emplace_back("SHA-256");
  for (std::size_t i = 0; i < envelope.inputs.size(); ++i) {
    const recording::Recording& recording = envelope.inputs[i];
    table.rows.push_back({recording.file.filename().string(), recording.format, base::plain(recording.rate_hz) + " Hz",
                          base::plain(recording.duration_s(), 4) + " s", std::to_string(recording.channels.size())});
    if (i < envelope.hashes.size()) table.rows.back().push_back(envelope.hashes[i].substr(0, 16));
  }
  if (!envelope.hashes.empty()) table.notes = {"The first 16 digits of the hash; the JSON result has all of them."};
  section.blocks.emplace_back(std::move(table));
  return section;
}

std::vector<std::pair<std::string, std::string>> facts(const Envelope& envelope) {
  std::vector<std::pair<std::string, std::string>> out = {{"made by", "stillmass " + std::string(base::version())},
                                                          {"command", envelope.command}};
  for (const auto& [key, value] : envelope.settings) {
    // Where results went and how much was printed changes no number.
    constexpr std::array silent{"html", "json", "csv", "out", "quiet", "threads"};
    if (std::find(silent.begin(), silent.end(), key) == silent.end()) out.emplace_back(key, value);
  }
  return out;
}

}  // namespace stillmass::report
