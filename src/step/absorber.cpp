#include "stillmass/step/absorber.hpp"

#include <utility>

#include "stillmass/base/number.hpp"

namespace stillmass::step {
namespace {

using absorber::ReasonCode;
using base::Code;
using base::Finding;

Finding finding(Code code, const std::string& text, const std::string& point) {
  return {code, text, point, {}, {}, base::Strength::fair};
}

std::string mm_s(double m_s) { return base::rounded(m_s * 1e3) + " mm/s"; }

void judge(const absorber::Specification& found, const absorber::Request& question, std::vector<Finding>& findings) {
  const std::string& point = question.mode.point;
  const auto note = [&](ReasonCode code) {
    for (const absorber::Reason& each : found.notes) {
      if (each.code == code) return true;
    }
    return found.reason.code == code;
  };
  if (found.predicted && question.constraints.target && found.predicted->worst_case > *question.constraints.target) {
    findings.push_back(finding(Code::target_not_met,
                               "5 % of the uncertain cases stay above " + mm_s(found.predicted->worst_case) +
                                   ", the target is " + mm_s(*question.constraints.target),
                               point));
  }
  if (note(ReasonCode::split_near_forcing)) {
    findings.push_back(finding(Code::speed_on_split, "a new natural frequency lies close to the forcing", point));
  }
  if (note(ReasonCode::outside_model_exceeds_target)) {
    findings.push_back(finding(
        Code::outside_model,
        "other lines and modes alone are " + mm_s(found.predicted ? found.predicted->outside_model : 0.0), point));
  }
}

}  // namespace

AbsorberResult size_absorber(AbsorberRequest request, const base::Context& context) {
  AbsorberResult result;
  result.question = std::move(request.question);
  if (request.stopped_shift) {
    modal::ShiftedMode shifted = modal::for_running_design(result.question.mode, *request.stopped_shift);
    result.question.mode = std::move(shifted.mode);
    if (shifted.finding) result.findings.push_back(std::move(*shifted.finding));
  }
  if (result.question.stock.materials.empty()) result.question.stock = stock();
  auto answer = absorber::specify(result.question, context);
  if (!answer) {
    result.refusal = answer.refusal();
    return result;
  }
  result.specification = std::move(*answer);
  judge(*result.specification, result.question, result.findings);
  return result;
}

}  // namespace stillmass::step
