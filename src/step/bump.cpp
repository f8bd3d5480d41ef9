#include "stillmass/step/bump.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/modal/headline.hpp"
#include "stillmass/modal/modal_mass.hpp"

namespace stillmass::step {
namespace {

// A test with an added mass finds the same mode below its frequency without, but not below this share of it.
constexpr double least_fall = 0.6;
// Two ways to a modal mass that differ by more than this and by more than twice their joint uncertainty disagree.
constexpr double mass_disagreement = 0.15;
// Standard uncertainty of a sensor's sensitivity where no calibration is stated, relative (common practice).
constexpr double assumed_calibration_u = 0.02;
// What no repetition shows: the recorder's clock, and the phase between two sensors' chains, which moves a natural
// frequency by the damping ratio times that angle (common practice: 50 parts in a million, one degree).
constexpr double clock_u = 5e-5;
constexpr double phase_u_rad = 0.0175;

struct Found {
  std::vector<modal::HitBlocks> blocks;
  std::optional<modal::HitSearch> first;  // names and calibration
};

bool same_setup(const recording::Recording& a, const recording::Recording& b) {
  return a.rate_hz == b.rate_hz && a.channels.size() == b.channels.size() &&
         std::equal(a.channels.begin(), a.channels.end(), b.channels.begin(),
                    [](const auto& x, const auto& y) { return x.role == y.role && x.name == y.name; });
}

void gather(recording::Reader& reader, const Part& part, Found& found, BumpResult& result,
            const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  modal::HitOptions options;
  options.range = frames_of(recording, part);
  modal::HitSearch search = modal::find_hits(reader, options, context);
  const std::string file = recording.file.filename().string();
  for (const modal::Hit& hit : search.hits) result.hits.push_back({file, hit});
  for (base::Finding& finding : search.findings) result.findings.push_back(std::move(finding));
  // Blocks of one length: that of the shortest.
  for (modal::HitBlocks& block : search.blocks) found.blocks.push_back(std::move(block));
  if (!found.first) found.first = std::move(search);
}

void cut_to_shortest(std::vector<modal::HitBlocks>& blocks) {
  std::size_t shortest = 0;
  for (const modal::HitBlocks& block : blocks) {
    for (const auto& response : block.responses) {
      shortest = shortest == 0 ? response.size() : std::min(shortest, response.size());
    }
  }
  for (modal::HitBlocks& block : blocks) {
    if (!block.force.empty()) block.force.resize(shortest);
    for (auto& response : block.responses) response.resize(shortest);
  }
}

bool with_force(const Found& found) { return !found.blocks.empty() && !found.blocks.front().force.empty(); }

std::string strongest_response(const Found& found, const std::string& wanted) {
  if (!wanted.empty() || found.first->responses.empty()) return wanted;
  return found.first->responses.front().point.empty() ? found.first->responses.front().channel
                                                      : found.first->responses.front().point;
}

// Where nobody stated a calibration, the common one stands in, and that is said.
void assume_calibration(modal::ImpactTestOptions& options, std::vector<base::Finding>& findings) {
  std::string whose = options.force_factor_u ? "" : "the hammer";
  options.force_factor_u = options.force_factor_u.value_or(assumed_calibration_u);
  for (modal::ResponseName& response : options.responses) {
    if (!response.factor_u) whose += (whose.empty() ? "" : ", ") + response.channel;
    response.factor_u = response.factor_u.value_or(assumed_calibration_u);
  }
  if (whose.empty()) return;
  findings.push_back({base::Code::calibration_assumed,
                      "no calibration is stated for " + whose + ": " + base::plain(100 * assumed_calibration_u) +
                          " % is taken for each; a modal mass carries it",
                      "",
                      {},
                      {},
                      base::Strength::fair});
}

void add_instrument_limits(std::vector<modal::Mode>& modes) {
  const auto widened = [](const base::Estimate& frequency, double damping_ratio) {
    if (!frequency.u) return frequency;  // what is not known stays not known
    const double relative = std::hypot(clock_u, damping_ratio * phase_u_rad);
    return modal::with_added_u(frequency, relative * frequency.value);
  };
  for (modal::Mode& mode : modes) {
    mode.frequency = widened(mode.frequency, mode.damping_ratio.value);
    for (modal::MethodResult& method : mode.methods) {
      method.frequency = widened(method.frequency, method.damping_ratio.value);
    }
  }
}

// Modes with frequency and damping of one set-up; what was measured goes into the result on the way.
std::optional<base::Refusal> find_modes(const Found& found, const BumpRequest& request, BumpResult& result,
                                        const base::Context& context) {
  if (with_force(found)) {
    modal::ImpactTestOptions options = modal::options_for(*found.first);
    if (!request.driving_point.empty()) options.driving_point = request.driving_point;
    options.band_hz = request.band_hz;
    options.max_frequency_hz = request.max_frequency_hz;
    options.state = request.state;
    assume_calibration(options, result.findings);
    auto answer = modal::impact_test(found.blocks, options, context);
    if (!answer) return answer.refusal();
    result.impact = std::move(*answer);
    result.modes = result.impact->modes;
    for (const base::Finding& finding : result.impact->findings) result.findings.push_back(finding);
    return {};
  }
  modal::RingDownOptions options;
  options.responses = found.first->responses;
  options.point = strongest_response(found, request.driving_point);
  options.band_hz = request.band_hz;
  options.max_frequency_hz = request.max_frequency_hz;
  options.state = request.state;
  auto answer = modal::ring_down_test(found.blocks, options, context);
  if (!answer) return answer.refusal();
  result.ring_down = std::move(*answer);
  result.modes = result.ring_down->modes;
  for (const base::Finding& finding : result.ring_down->findings) result.findings.push_back(finding);
  return {};
}

// The mode of a test with an added mass that belongs to `mode`: the nearest one below it.
const modal::Mode* fallen(const std::vector<modal::Mode>& with_mass, const modal::Mode& mode) {
  const modal::Mode* best = nullptr;
  for (const modal::Mode& each : with_mass) {
    const double ratio = each.frequency.value / mode.frequency.value;
    if (ratio < least_fall || ratio > 1.005) continue;
    if (best == nullptr || each.frequency.value > best->frequency.value) best = &each;
  }
  return best;
}

void weigh(modal::Mode& mode, const std::vector<modal::AddedMass>& tests, BumpResult& result) {
  const auto mass = modal::mass_from_added_mass(mode.frequency, tests);
  const std::string at = base::rounded(mode.frequency.value, 4) + " Hz";
  if (!mass) return;
  if (!mode.modal_mass) {
    mode.modal_mass = *mass;
    return;
  }
  const double difference = std::abs(mass->value - mode.modal_mass->value);
  const double joint = std::hypot(mass->u.value_or(0.0), mode.modal_mass->u.value_or(0.0));
  if (difference > 2.0 * joint && difference > mass_disagreement * mode.modal_mass->value) {
    result.findings.push_back({base::Code::methods_disagree,
                               "modal mass of the mode at " + at + ": " + base::rounded(mode.modal_mass->value) +
                                   " kg from the hammer, " + base::rounded(mass->value) + " kg from the added mass",
                               mode.point});
  }
}

}  // namespace

BumpResult bump(const std::vector<recording::Reader*>& readers, const BumpRequest& request,
                const base::Context& context) {
  if (readers.empty()) throw base::Error(base::ErrorKind::internal, "bump", "no recording");
  BumpResult result;
  Found found;
  for (recording::Reader* reader : readers) {
    if (!same_setup(reader->recording(), readers.front()->recording())) {
      throw base::usage_error(reader->recording().file.string(),
                              "its channels or rate differ from those of the first file",
                              "give recordings of one set-up together, others in a call of their own");
    }
    result.recordings.push_back(reader->recording());
    for (const base::Finding& finding : reader->recording().findings) result.findings.push_back(finding);
    gather(*reader, request.part, found, result, context);
  }
  cut_to_shortest(found.blocks);
  result.refusal = find_modes(found, request, result, context);
  add_instrument_limits(result.modes);
  if (result.refusal || request.added_masses.empty()) return result;

  std::vector<std::vector<modal::AddedMass>> tests(result.modes.size());
  for (const AddedMassTest& test : request.added_masses) {
    BumpRequest plain = request;
    plain.added_masses.clear();
    BumpResult heavier = bump({test.reader}, plain, context);
    result.recordings.push_back(test.reader->recording());
    result.hits.insert(result.hits.end(), heavier.hits.begin(), heavier.hits.end());
    for (std::size_t i = 0; i < result.modes.size(); ++i) {
      const modal::Mode* mode = fallen(heavier.modes, result.modes[i]);
      if (mode == nullptr) continue;
      tests[i].push_back({{test.mass_kg, {}, {}, base::Quantity::mass}, mode->frequency});
    }
  }
  for (std::size_t i = 0; i < result.modes.size(); ++i) {
    if (!tests[i].empty()) weigh(result.modes[i], tests[i], result);
  }
  return result;
}

}  // namespace stillmass::step
