#include "stillmass/report/result_json.hpp"

#include <cmath>
#include <complex>
#include <optional>
#include <set>

#include "stillmass/base/version.hpp"
#include "stillmass/report/sentences.hpp"

#include "report/json_parts.hpp"
#include "report/spectrum_json.hpp"

namespace stillmass::report {
namespace {

using base::Detector;
using base::Estimate;
using base::Quantity;

constexpr double to_rpm = 60.0;

Json input(const recording::Recording& recording, const std::string& hash) {
  Json channels = Json::array();
  for (const recording::Channel& channel : recording.channels) {
    channels.push_back({{"index", channel.index},
                        {"name", channel.name},
                        {"role", name(channel.role)},
                        {"unit", channel.unit_known ? Json(channel.unit.name) : Json(nullptr)}});
  }
  Json out = {{"file", recording.file.string()},
              {"format", recording.format},
              {"rate_hz", number(recording.rate_hz)},
              {"duration_s", number(recording.duration_s())},
              {"channels", channels}};
  if (!hash.empty()) out["sha256"] = hash;
  return out;
}

std::string wrapped(const Envelope& envelope, Json result) {
  Json out;
  out["schema"] = "stillmass.result/1";
  out["command"] = envelope.command;
  out["version"] = base::version();
  out["settings"] = Json::object();
  for (const auto& [key, value] : envelope.settings) {
    Json& place = out["settings"][key];
    if (place.is_null()) {
      place = value;
    } else {
      if (!place.is_array()) place = Json::array({place});
      place.push_back(value);
    }
  }
  out["inputs"] = Json::array();
  for (std::size_t i = 0; i < envelope.inputs.size(); ++i) {
    out["inputs"].push_back(input(envelope.inputs[i], i < envelope.hashes.size() ? envelope.hashes[i] : ""));
  }
  out["warnings"] = findings(envelope.warnings);
  out["result"] = std::move(result);
  return out.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

Json check(const step::CheckResult& result) {
  Json channels = Json::array();
  for (const step::ChannelCheck& each : result.channels) {
    const recording::ChannelQuality& quality = each.quality;
    channels.push_back({{"file", result.recording.file.string()},
                        {"name", each.channel.name},
                        {"verdict", name(each.verdict)},
                        {"unit", base::si_unit(each.channel.unit.quantity).name},
                        {"rms", number(quality.rms)},
                        {"peak", number(quality.peak)},
                        {"mean", number(quality.mean)},
                        {"crest_factor", number(quality.crest_factor)},
                        {"findings", findings(each.findings)}});
  }
  return channels;
}

Json bump(const step::BumpResult& result) {
  Json out;
  out["hits"] = Json::array();
  for (const step::FileHit& each : result.hits) {
    out["hits"].push_back({{"file", each.file},
                           {"time_s", number(each.hit.time_s)},
                           {"peak", number(each.hit.peak)},
                           {"used", each.hit.used},
                           {"verdict", modal::name(each.hit.verdict)},
                           {"reason", each.hit.reason}});
  }
  out["modes"] = modes(result.modes);
  if (result.refusal) out["refused"] = refusal(*result.refusal);
  out["findings"] = findings(result.findings);
  return out;
}

Json runup(const step::RunupResult& result) {
  Json out;
  if (result.runup) {
    const base::Interval range = result.runup->speed.speed_range();
    out["speed"] = {{"from_rpm", number(range.lo * to_rpm)},
                    {"to_rpm", number(range.hi * to_rpm)},
                    {"trend", rotation::name(result.runup->speed.trend())},
                    {"pulses", result.runup->pulses.time_s.size()},
                    {"source", "tacho"}};
  } else {
    out["speed"] = nullptr;
  }
  out["orders"] = Json::array();
  for (const rotation::OrderTrack& track : result.tracks) {
    const Shown unit = shown(track.quantity, Detector::rms);
    Json speed = Json::array();
    Json amplitude = Json::array();
    Json phase = Json::array();
    for (std::size_t i = 0; i < track.value.size(); ++i) {
      speed.push_back(number(track.speed_hz[i] * to_rpm));
      amplitude.push_back(number(track.amplitude_rms(i) * unit.factor));
      phase.push_back(number(track.phase_lag_deg(i)));
    }
    out["orders"].push_back({{"order", number(track.order)},
                             {"channel", track.channel},
                             {"quantity", base::name(track.quantity)},
                             {"detector", "rms"},
                             {"unit", unit.unit},
                             {"speed_rpm", speed},
                             {"amplitude", amplitude},
                             {"phase_deg", phase}});
  }
  out["critical_speeds"] = Json::array();
  for (const step::CriticalSpeedFound& each : result.critical_speeds) {
    out["critical_speeds"].push_back({{"speed_rpm", estimate(each.speed, to_rpm, "rpm")},
                                      {"peak_speed_rpm", number(each.peak_speed_hz, to_rpm)},
                                      {"order", number(each.order)},
                                      {"channel", each.channel},
                                      {"amplification_factor", number(each.amplification_factor)},
                                      {"mode", each.mode ? mode(*each.mode) : Json(nullptr)}});
  }
  if (result.refusal) out["refused"] = refusal(*result.refusal);
  out["findings"] = findings(result.findings);
  return out;
}

Json reason(const absorber::Reason& each) {
  Json numbers = Json::object();
  for (const absorber::Number& value : each.numbers) {
    numbers[std::string(value.name)] = {{"value", number(value.value)}, {"unit", base::si_unit(value.quantity).name}};
  }
  return {{"code", absorber::name(each.code)}, {"text", sentence(each)}, {"numbers", numbers}};
}

Json predicted(const absorber::Predicted& each) {
  return {{"point", each.point},
          {"quantity", "velocity"},
          {"unit", "mm/s"},
          {"band_hz", {number(each.band_hz.lo), number(each.band_hz.hi)}},
          {"before", velocity(each.before)},
          {"after", velocity(each.after)},
          {"component_before", velocity(each.component_before)},
          {"component_after", velocity(each.component_after)},
          {"at_duty", velocity(each.at_duty)},
          {"worst_case", number(each.worst_case * to_mm_s)},
          {"outside_model", number(each.outside_model * to_mm_s)},
          {"probability_meets_target", number(each.probability_meets_target)}};
}

Json hardware(const absorber::Specification& specification) {
  Json out = Json::array();
  for (const absorber::BladeOption& each : specification.blades) {
    out.push_back({{"kind", "blade"},
                   {"material", each.material},
                   {"count", each.count},
                   {"free_length_mm", number(each.blade.length_m * 1e3)},
                   {"width_mm", number(each.blade.width_m * 1e3)},
                   {"thickness_mm", number(each.blade.thickness_m * 1e3)},
                   {"tip_mass_kg", number(each.tip_mass_kg)},
                   {"stress_mpa", number(each.stress_pa * 1e-6)},
                   {"endurance_factor", number(each.endurance_factor)},
                   {"sag_mm", number(each.sag_m * 1e3)},
                   {"second_mode_hz", number(each.second_mode_hz)},
                   {"hz_per_mm", number(each.frequency_per_m * 1e-3)}});
  }
  for (const absorber::SpringOption& each : specification.springs) {
    out.push_back({{"kind", "helical spring"},
                   {"material", each.material},
                   {"count", each.count},
                   {"wire_mm", number(each.spring.wire_m * 1e3)},
                   {"coil_mm", number(each.spring.coil_m * 1e3)},
                   {"active_coils", number(each.spring.active_coils)},
                   {"rate_n_per_m", number(each.spring.rate())},
                   {"stress_mpa", number(each.stress_pa * 1e-6)},
                   {"endurance_factor", number(each.endurance_factor)},
                   {"surge_hz", number(each.surge_hz)}});
  }
  return out;
}

Json remedies(const absorber::Specification& specification) {
  Json out = Json::array();
  for (const absorber::Remedy& each : specification.remedies) {
    out.push_back({{"remedy", absorber::name(each.kind)},
                   {"text", sentence(each)},
                   {"amount", number(each.amount)},
                   {"unit", base::si_unit(each.quantity).name},
                   {"component_after", number(each.component_rms * to_mm_s)}});
  }
  return out;
}

Json absorber_result(const step::AbsorberResult& result) {
  Json out;
  out["mode"] = mode(result.question.mode);
  if (result.refusal) out["refused"] = refusal(*result.refusal);
  if (!result.specification) {
    out["recommendation"] = "none";
    out["reason"] = nullptr;
    return out;
  }
  const absorber::Specification& found = *result.specification;
  out["recommendation"] = absorber::name(found.recommendation);
  out["reason"] = reason(found.reason);
  out["notes"] = Json::array();
  for (const absorber::Reason& note : found.notes) out["notes"].push_back(reason(note));
  const auto put = [&](const absorber::AbsorberData& data) {
    out["mass_kg"] = number(data.mass_kg);
    out["mass_ratio"] = number(data.mass_ratio);
    out["frequency_hz"] = number(data.frequency_hz);
    out["stiffness_n_per_m"] = number(data.stiffness);
    out["damping_ratio"] = number(data.damping_ratio);
    out["damping_n_s_per_m"] = number(data.damping_constant);
    out["split_frequencies_hz"] = {number(data.split_frequencies_hz[0]), number(data.split_frequencies_hz[1])};
  };
  if (found.absorber) put(*found.absorber);
  out["predicted"] = found.predicted ? predicted(*found.predicted) : Json(nullptr);
  out["others"] = Json::array();
  for (const absorber::Predicted& other : found.others) out["others"].push_back(predicted(other));
  out["travel_mm"] = found.predicted ? estimate(found.predicted->travel_m, 1e3, "mm") : Json(nullptr);
  out["travel_passing_mm"] =
      found.passing ? number(found.passing->passing_m.value_or(found.passing->steady_m) * 1e3) : Json(nullptr);
  out["hardware"] = hardware(found);
  out["tuning"] = Json::array();
  for (const absorber::TuningPoint& point : found.tuning) {
    out["tuning"].push_back(
        {{"free_length_mm", number(point.free_length_m * 1e3)}, {"frequency_hz", number(point.frequency_hz)}});
  }
  out["frequency_per_kelvin"] = number(found.frequency_per_kelvin);
  out["remedies"] = remedies(found);
  out["spread_by"] = Json::array();
  for (const numeric::Driver& driver : found.drivers) {
    out["spread_by"].push_back({{"input", driver.input}, {"share", number(driver.share)}});
  }
  return out;
}

Json after_point(const survey::AfterPoint& each) {
  return {{"point", each.point},
          {"band_hz", {number(each.band_hz.lo), number(each.band_hz.hi)}},
          {"before", velocity(each.before)},
          {"after", velocity(each.after)},
          {"predicted", velocity(each.predicted)},
          {"component_before", velocity(each.component_before)},
          {"component_after", velocity(each.component_after)},
          {"deviation", number(each.achieved.deviation)},
          {"meets_target", each.meets_target ? Json(*each.meets_target) : Json(nullptr)}};
}

}  // namespace

std::string json(const Envelope& envelope, const std::vector<step::CheckResult>& results) {
  Json channels = Json::array();
  for (const step::CheckResult& result : results) {
    for (Json& channel : check(result)) channels.push_back(std::move(channel));
  }
  return wrapped(envelope, {{"channels", channels}});
}

std::string json(const Envelope& envelope, const step::SpectrumResult& result) {
  return wrapped(envelope, spectrum(result));
}

std::string json(const Envelope& envelope, const step::BumpResult& result) { return wrapped(envelope, bump(result)); }

std::string json(const Envelope& envelope, const step::RunupResult& result) { return wrapped(envelope, runup(result)); }

std::string json(const Envelope& envelope, const step::AbsorberResult& result) {
  return wrapped(envelope, absorber_result(result));
}

std::string json(const Envelope& envelope, const survey::SurveyResult& result) {
  Json out;
  const auto file = [&](std::size_t index) { return result.survey.recordings[index].written; };
  out["machine"] = result.survey.machine.name;
  out["target_mm_s"] = number(result.target_m_s, to_mm_s);
  out["summary"] = summary(result);
  out["calibrations"] = Json::array();
  for (const survey::ChannelCalibration& each : result.calibrations.channels) {
    out["calibrations"].push_back({{"file", file(each.recording)},
                                   {"channel", each.channel},
                                   {"sensor", each.sensor.empty() ? Json(nullptr) : Json(each.sensor)},
                                   {"measured", estimate(each.result.measured)},
                                   {"frequency_hz", number(each.result.frequency_hz)},
                                   {"correction", estimate(each.result.correction)},
                                   {"applied", each.applied},
                                   {"text", each.text}});
  }
  out["quality"] = Json::array();
  for (const auto& [index, each] : result.quality) {
    out["quality"].push_back({{"file", file(index)}, {"verdict", name(each.verdict)}, {"channels", check(each)}});
  }
  out["spectra"] = Json::array();
  for (const auto& [index, each] : result.spectra) {
    Json row = {{"file", file(index)}, {"stage", survey::name(result.survey.recordings[index].stage)}};
    row.update(spectrum(each));
    out["spectra"].push_back(row);
  }
  out["bumps"] = Json::array();
  for (const step::BumpResult& each : result.bumps) out["bumps"].push_back(bump(each));
  out["modes"] = modes(result.modes);
  out["runups"] = Json::array();
  for (const auto& [index, each] : result.runups) {
    Json row = {{"file", file(index)}};
    row.update(runup(each));
    out["runups"].push_back(row);
  }
  out["power_cuts"] = Json::array();
  for (const auto& [index, each] : result.power_cuts) {
    out["power_cuts"].push_back({{"file", file(index)},
                                 {"channel", each.channel},
                                 {"verdict", rotation::name(each.result.verdict)},
                                 {"text", each.result.reason},
                                 {"cut_s", estimate(each.result.cut_s)},
                                 {"frequency", estimate(each.result.frequency)}});
  }
  out["deflections"] = deflections(result.shapes);
  out["findings"] = machine_findings(result.findings);
  out["refusals"] = Json::array();
  for (const base::Refusal& each : result.refusals) out["refusals"].push_back(refusal(each));
  out["remedies"] = Json::array();
  out["absorber"] = nullptr;
  if (!result.absorbers.empty()) {
    const survey::AbsorberAim& first = result.absorbers.front();
    out["absorber"] = absorber_result(first.result);
    out["absorber"]["point"] = first.site.point;
    out["absorber"]["forcing"] = {{"name", first.forcing_name}, {"frequency", estimate(first.forcing)}};
    if (first.result.specification) out["remedies"] = remedies(*first.result.specification);
  }
  out["other_absorbers"] = Json::array();
  for (std::size_t i = 1; i < result.absorbers.size(); ++i) {
    Json row = absorber_result(result.absorbers[i].result);
    row["point"] = result.absorbers[i].site.point;
    out["other_absorbers"].push_back(row);
  }
  out["after"] = Json::array();
  for (const survey::AfterPoint& each : result.after) out["after"].push_back(after_point(each));
  return wrapped(envelope, out);
}

}  // namespace stillmass::report
