#include "stillmass/report/result_read.hpp"

#include <cmath>
#include <fstream>
#include <optional>

#include <nlohmann/json.hpp>

#include "stillmass/base/error.hpp"

namespace stillmass::report {
namespace {

using Json = nlohmann::json;

base::Estimate estimate(const Json& json, base::Quantity quantity) {
  base::Estimate out;
  out.quantity = quantity;
  out.value = json.at("value").get<double>();
  if (const Json& u = json.at("u"); !u.is_null()) out.u = u.get<double>();
  return out;
}

modal::Mode mode(const Json& json) {
  modal::Mode out;
  out.frequency = estimate(json.at("frequency"), base::Quantity::frequency);
  out.damping_ratio = estimate(json.at("damping_ratio"), base::Quantity::ratio);
  if (const Json& mass = json.at("modal_mass"); !mass.is_null()) out.modal_mass = estimate(mass, base::Quantity::mass);
  out.point = json.at("point").get<std::string>();
  out.state = json.at("state").get<std::string>();
  out.correlation = json.at("correlation").get<std::array<std::array<double, 3>, 3>>();
  for (const Json& ratio : json.at("shape")) {
    out.shape.push_back(
        {ratio.at("point").get<std::string>(), ratio.at("ratio").get<double>(), ratio.at("phase_deg").get<double>()});
  }
  return out;
}

}  // namespace

std::vector<modal::Mode> read_modes(const std::filesystem::path& file) {
  std::ifstream in(file, std::ios::binary);
  if (!in) throw base::file_error(file.string(), "cannot be read");
  try {
    const Json json = Json::parse(in);
    if (json.at("schema") != "stillmass.result/1") {
      throw base::file_error(file.string(), "is not a result of this program", "give a file written with --json");
    }
    std::vector<modal::Mode> modes;
    for (const Json& each : json.at("result").at("modes")) modes.push_back(mode(each));
    return modes;
  } catch (const Json::exception&) {
    throw base::file_error(file.string(), "is not a result with modes",
                           "give a file written by bump or survey with --json");
  }
}

}  // namespace stillmass::report
