#pragma once

#include <optional>
#include <string_view>
#include <vector>

#include <nlohmann/json.hpp>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::report {

/// Keys keep the order in which they are written.
using Json = nlohmann::ordered_json;

inline constexpr double to_mm_s = 1e3;

/// null for what is absent or not finite.
Json number(double value);
Json number(std::optional<double> value, double factor = 1.0);
/// {"value", "u", "unit"}: in the SI unit of its quantity, or value and u times factor in that unit.
Json estimate(const base::Estimate& value, double factor, std::string_view unit);
Json estimate(const base::Estimate& value);
Json estimate(const std::optional<base::Estimate>& value);
Json velocity(const base::Estimate& value);  ///< mm/s
Json velocity(const std::optional<base::Estimate>& value);

/// Vibration in the trade's unit of its quantity and in the detector asked for.
struct Shown {
  std::string_view unit;
  double factor = 1.0;
};
Shown shown(base::Quantity quantity, base::Detector detector);

Json finding(const base::Finding& each);
Json findings(const std::vector<base::Finding>& all);
/// With strength, evidence, and what would confirm or refute.
Json machine_findings(const std::vector<base::Finding>& all);
Json refusal(const base::Refusal& each);
Json mode(const modal::Mode& each);
Json modes(const std::vector<modal::Mode>& all);

}  // namespace stillmass::report
