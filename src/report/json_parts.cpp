#include "report/json_parts.hpp"

#include <cmath>

namespace stillmass::report {

using base::Detector;
using base::Estimate;
using base::Quantity;

Json number(double value) { return std::isfinite(value) ? Json(value) : Json(nullptr); }
Json number(std::optional<double> value, double factor) { return value ? number(*value * factor) : Json(nullptr); }

Json estimate(const Estimate& value, double factor, std::string_view unit) {
  return {{"value", number(value.value * factor)}, {"u", number(value.u, std::abs(factor))}, {"unit", unit}};
}
Json estimate(const Estimate& value) { return estimate(value, 1.0, base::si_unit(value.quantity).name); }
Json estimate(const std::optional<Estimate>& value) { return value ? estimate(*value) : Json(nullptr); }
Json velocity(const Estimate& value) { return estimate(value, to_mm_s, "mm/s"); }
Json velocity(const std::optional<Estimate>& value) { return value ? velocity(*value) : Json(nullptr); }

Shown shown(Quantity quantity, Detector detector) {
  const base::Unit unit = base::trade_unit(quantity);
  return {unit.name, base::from_rms(detector) / unit.to_si};
}

Json finding(const base::Finding& each) {
  Json out = {{"code", base::text(each.code).name}, {"text", each.text}};
  if (!each.channel.empty()) out["channel"] = each.channel;
  if (each.from_s) out["from_s"] = number(*each.from_s);
  if (each.to_s) out["to_s"] = number(*each.to_s);
  return out;
}

Json findings(const std::vector<base::Finding>& all) {
  Json out = Json::array();
  for (const base::Finding& each : all) out.push_back(finding(each));
  return out;
}

Json machine_findings(const std::vector<base::Finding>& all) {
  Json out = Json::array();
  for (const base::Finding& each : all) {
    Json row = finding(each);
    row["strength"] = base::name(each.strength);
    row["evidence"] = each.evidence;
    row["confirm"] = each.confirm;
    row["refute"] = each.refute;
    out.push_back(row);
  }
  return out;
}

Json refusal(const base::Refusal& each) {
  return {{"code", each.code}, {"seen", each.seen}, {"measure", each.measure}};
}

Json mode(const modal::Mode& each) {
  Json out = {{"frequency", estimate(each.frequency)},
              {"damping_ratio", estimate(each.damping_ratio)},
              {"modal_mass", estimate(each.modal_mass)},
              {"point", each.point},
              {"state", each.state},
              {"correlation", each.correlation}};
  out["shape"] = Json::array();
  for (const modal::ShapeRatio& ratio : each.shape) {
    out["shape"].push_back(
        {{"point", ratio.point}, {"ratio", number(ratio.ratio)}, {"phase_deg", number(ratio.phase_deg)}});
  }
  out["masked_by"] = each.masked_by ? Json(*each.masked_by) : Json(nullptr);
  out["methods"] = Json::array();
  for (const modal::MethodResult& method : each.methods) {
    out["methods"].push_back({{"name", method.name},
                              {"frequency", estimate(method.frequency)},
                              {"damping_ratio", estimate(method.damping_ratio)}});
  }
  return out;
}

Json modes(const std::vector<modal::Mode>& all) {
  Json out = Json::array();
  for (const modal::Mode& each : all) out.push_back(mode(each));
  return out;
}

}  // namespace stillmass::report
