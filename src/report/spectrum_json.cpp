#include "report/spectrum_json.hpp"

#include <numbers>

#include "report/spectrum_sentences.hpp"

namespace stillmass::report {
namespace {

constexpr double to_rpm = 60.0;
constexpr double to_deg = 180.0 / std::numbers::pi;

Json range(base::Interval interval) { return {number(interval.lo), number(interval.hi)}; }

Json judged(const machine::JudgedLevel& each) {
  Json limits = Json::array();
  for (const double limit : each.limits) limits.push_back(number(limit));
  return {{"judged", machine::name(each.judged)},
          {"value", estimate(each.value)},
          {"limits_si", limits},
          {"zone", machine::name(each.zone)}};
}

Json severity(const step::ChannelSpectrum& channel) {
  if (!channel.severity) return nullptr;
  const step::Severity& found = *channel.severity;
  Json limits = Json::array();
  for (const double limit : found.limits.velocity) limits.push_back(number(limit * to_mm_s));
  Json could_be = Json::array();
  for (const machine::Zone zone : found.verdict.could_be) could_be.push_back(machine::name(zone));
  Json levels = Json::array();
  for (const machine::JudgedLevel& each : found.verdict.levels) levels.push_back(judged(each));
  return {{"standard", found.limits.standard},
          {"category", found.limits.category},
          {"zone", machine::name(found.verdict.zone)},
          {"could_be", could_be},
          {"value_mm_s", number(found.velocity * to_mm_s)},
          {"limits_mm_s", limits},
          {"levels", levels},
          {"band_hz", range(found.limits.band_hz)},
          {"source", found.limits.source},
          {"note", found.limits.note}};
}

Json typical(const step::ChannelSpectrum& channel, const step::SpectrumResult& result) {
  if (!channel.typical || !result.typical_ranges) return nullptr;
  Json ranges = Json::array();
  for (const base::Interval& each : result.typical_ranges->boundary) {
    ranges.push_back({number(each.lo * to_mm_s), number(each.hi * to_mm_s)});
  }
  Json place = Json::array();
  for (const machine::Place each : channel.typical->place) place.push_back(machine::name(each));
  return {{"standard", result.typical_ranges->standard},
          {"ranges_mm_s", ranges},
          {"place", place},
          {"text", channel.typical->text},
          {"source", result.typical_ranges->source}};
}

Json background(const step::ChannelSpectrum& channel) {
  if (!channel.background) return nullptr;
  const spectral::BackgroundLevel& each = *channel.background;
  Json out = {{"band_hz", range(each.band_hz)},
              {"level", velocity(each.background)},
              {"share", estimate(each.share)},
              {"doubtful", each.is_doubtful},
              {"without_it", each.machine ? velocity(*each.machine) : Json(nullptr)}};
  if (!each.machine) out["refused"] = refusal(each.machine.refusal());
  return out;
}

Json envelope(const step::EnvelopeResult& each) {
  if (!each.envelope) return {{"refused", refusal(each.envelope.refusal())}};
  Json peaks = Json::array();
  for (const step::EnvelopePeak& peak : each.peaks) {
    peaks.push_back(
        {{"frequency", estimate(peak.tone.frequency)}, {"depth", estimate(peak.depth)}, {"cause", peak.cause.text}});
  }
  return {{"band_hz", range(each.envelope->band_hz)},
          {"chosen", each.envelope->choice.has_value()},
          {"kurtosis", number(each.envelope->kurtosis)},
          {"mean", estimate(each.envelope->mean)},
          {"peaks", peaks}};
}

Json synchronous(const rotation::SynchronousAverage& average, base::Detector detector) {
  const Shown unit = shown(average.quantity, detector);
  Json lines = Json::array();
  for (const rotation::SynchronousLine& line : average.lines) {
    lines.push_back({{"order", number(line.order)},
                     {"amplitude", estimate(line.amplitude_rms, unit.factor, unit.unit)},
                     {"phase_lag_deg", number(line.phase_lag_deg)},
                     {"phase_u_deg", number(line.phase_u_deg)}});
  }
  return {{"blocks", average.blocks},
          {"turns", average.turns_per_block},
          {"speed_rpm", number(average.speed_hz, to_rpm)},
          {"share", number(average.synchronous_share)},
          {"lines", lines}};
}

Json peak(const step::SpectralPeak& each, const Shown& unit, const step::ChannelSpectrum& channel,
          base::Detector detector) {
  Json out = {{"frequency", estimate(each.tone.frequency)},
              {"amplitude", estimate(each.tone.amplitude_rms, unit.factor, unit.unit)},
              {"quantity", base::name(channel.shown.quantity)},
              {"detector", base::name(detector)},
              {"cause", each.cause.text}};
  out["background_share"] = each.background ? estimate(each.background->share) : Json(nullptr);
  out["closeness"] = spectral::name(each.closeness);
  out["note"] = each.note;
  return out;
}

Json features(const recording::ChannelFeatures& each) {
  return {{"unit", base::si_unit(each.quantity).name},
          {"mean", number(each.mean)},
          {"rms", number(each.deviation)},
          {"peak", number(each.peak)},
          {"crest_factor", number(each.crest_factor)},
          {"kurtosis", number(each.kurtosis)}};
}

Json channel(const step::SpectrumResult& result, const step::ChannelSpectrum& each) {
  const Shown unit = shown(each.shown.quantity, result.detector);
  Json out = {{"name", each.channel.name}, {"point", each.channel.point}};
  out["overall"] = nullptr;
  if (each.overall) {
    out["overall"] = {{"quantity", base::name(each.shown.quantity)},
                      {"detector", base::name(result.detector)},
                      {"band_hz", range(each.band_hz)},
                      {"unit", unit.unit},
                      {"value", number(each.overall->value * unit.factor)},
                      {"u", number(each.overall->u, unit.factor)}};
  }
  out["low_limit_hz"] = number(each.low_limit_hz);
  out["features"] = features(each.features);
  out["peaks"] = Json::array();
  for (const step::SpectralPeak& found : each.peaks) {
    out["peaks"].push_back(peak(found, unit, each, result.detector));
  }
  out["third_octaves"] = Json::array();
  for (const spectral::BandLevel& band : each.third_octaves.bands) {
    out["third_octaves"].push_back(
        {{"nominal_hz", number(band.nominal_hz)}, {"level", estimate(band.rms, unit.factor, unit.unit)}});
  }
  out["severity"] = severity(each);
  if (!each.severity) out["severity_refused"] = refusal(each.severity.refusal());
  out["typical_ranges"] = typical(each, result);
  out["plant"] = nullptr;
  if (each.plant) {
    out["plant"] = {{"state", machine::name(each.plant->state)}, {"over", number(each.plant->over)}};
  }
  out["background"] = background(each);
  if (each.envelope) out["envelope"] = envelope(*each.envelope);
  if (each.synchronous) out["synchronous"] = synchronous(*each.synchronous, result.detector);
  out["findings"] = findings(each.findings);
  return out;
}

Json members(const std::vector<spectral::FamilyMember>& all) {
  Json out = Json::array();
  for (const spectral::FamilyMember& each : all) out.push_back(each.number);
  return out;
}

}  // namespace

Json deflections(const std::vector<step::OperatingDeflection>& shapes) {
  Json out = Json::array();
  for (const step::OperatingDeflection& each : shapes) {
    Json points = Json::array();
    for (const spectral::Deflection& point : each.shape.points) {
      points.push_back({{"point", point.point},
                        {"magnitude", estimate(point.magnitude)},
                        {"phase", point.phase ? estimate(*point.phase, to_deg, "deg") : Json(nullptr)},
                        {"coherence", number(point.coherence)}});
    }
    Json missing = Json::array();
    for (const spectral::PointRefusal& point : each.shape.not_given) {
      missing.push_back({{"point", point.point}, {"why", refusal(point.why)}});
    }
    out.push_back({{"name", each.name},
                   {"order", number(each.order)},
                   {"frequency", estimate(each.shape.frequency)},
                   {"reference", each.shape.reference},
                   {"sign_known", each.shape.sign_known},
                   {"levels_agree", each.shape.levels_agree},
                   {"recordings", each.shape.recordings},
                   {"points", points},
                   {"not_given", missing}});
  }
  return out;
}

Json spectrum(const step::SpectrumResult& result) {
  Json out;
  out["channels"] = Json::array();
  for (const step::ChannelSpectrum& each : result.channels) out["channels"].push_back(channel(result, each));
  out["speed"] = result.speed ? estimate(*result.speed, to_rpm, "rpm") : Json(nullptr);
  const spectral::Spectrum* lines = averaged(result);
  out["resolution_hz"] = lines == nullptr ? Json(nullptr) : number(lines->line_hz);
  out["blocks"] = lines == nullptr ? Json(nullptr) : Json(lines->blocks);
  out["effective_averages"] = lines == nullptr ? Json(nullptr) : number(lines->effective_averages);
  out["lines_chosen"] = {{"reason", spectral::name(result.choice.reason)}, {"text", result.choice.text()}};
  out["worst"] = result.worst ? Json(result.channels[*result.worst].channel.name) : Json(nullptr);
  out["families"] = Json::array();
  for (const spectral::HarmonicFamily& each : result.families.harmonics) {
    out["families"].push_back({{"fundamental", estimate(each.fundamental)},
                               {"numbers", members(each.members)},
                               {"half_orders", each.half_orders}});
  }
  out["side_bands"] = Json::array();
  for (const spectral::SideBandFamily& each : result.families.side_bands) {
    out["side_bands"].push_back({{"carrier", estimate(result.tones[each.carrier].frequency)},
                                 {"spacing", estimate(each.spacing)},
                                 {"numbers", members(each.members)}});
  }
  out["forcing"] = Json::array();
  for (const machine::Forcing& each : result.forcing) {
    out["forcing"].push_back({{"name", each.name},
                              {"kind", machine::name(each.kind)},
                              {"frequency", estimate(each.frequency)},
                              {"order", number(each.order)}});
  }
  out["deflections"] = deflections(result.shapes);
  out["causes"] = machine_findings(result.causes);
  out["refusals"] = Json::array();
  for (const base::Refusal& each : result.refusals) out["refusals"].push_back(refusal(each));
  return out;
}

}  // namespace stillmass::report
