#include "stillmass/step/check.hpp"

#include <algorithm>
#include <optional>
#include <span>

#include "stillmass/base/error.hpp"
#include "stillmass/recording/pass.hpp"
#include "stillmass/spectral/spectral_quality.hpp"

#include "step/channel_checks.hpp"

namespace stillmass::step {
namespace {

using base::Code;
using base::Finding;

constexpr double most_missing = 0.2;  // of the samples; with more the channel is unusable (common practice)

// Spikes, cut-off tops, dropouts and the recorder's own steps are wide in frequency: they, not a lacking filter, fill
// the top of the spectrum.
void blame_the_cause(std::vector<Finding>& findings) {
  const bool is_wide = std::any_of(findings.begin(), findings.end(), [](const Finding& each) {
    return each.code == Code::spikes || each.code == Code::clipped || each.code == Code::overload ||
           each.code == Code::dropout || each.code == Code::near_noise_floor || each.code == Code::few_bits;
  });
  if (is_wide) std::erase_if(findings, [](const Finding& each) { return each.code == Code::aliasing_suspected; });
}

Verdict worst(const std::vector<Finding>& findings, recording::Role role) {
  Verdict verdict = Verdict::good;
  for (const Finding& finding : findings) verdict = std::max(verdict, weight(finding, role));
  return verdict;
}

}  // namespace

std::string_view name(Verdict verdict) {
  switch (verdict) {
    case Verdict::good:
      return "good";
    case Verdict::doubtful:
      return "doubtful";
    case Verdict::unusable:
      return "unusable";
  }
  return "";
}

Verdict weight(const Finding& finding, recording::Role role) {
  switch (finding.code) {
    case Code::no_signal:
    case Code::flat_line:
    case Code::no_pulses:
      return Verdict::unusable;
    case Code::identical_channels:
    case Code::channels_swapped:
      return finding.strength == base::Strength::strong ? Verdict::unusable : Verdict::doubtful;
    case Code::clipped:
    case Code::overload:
    case Code::dropout:
      return finding.strength == base::Strength::strong && role != recording::Role::force ? Verdict::unusable
                                                                                          : Verdict::doubtful;
    default:
      return Verdict::doubtful;
  }
}

CheckResult check(const recording::Reader& reader, const CheckRequest& request, const base::Context& context) {
  CheckResult result;
  result.recording = reader.recording();
  result.range = frames_of(result.recording, request.part);

  recording::SampleQuality samples(reader.recording(), result.range);
  recording::Overview overview(reader.recording(), result.range, request.overview_columns);
  std::optional<spectral::SpectrumConsumer> spectra;
  try {
    spectra.emplace(reader.recording(), result.range, spectral::SpectrumOptions{});
  } catch (const base::Error&) {
    // Too short for a spectrum: the samples are judged all the same.
  }
  std::vector<recording::Consumer*> consumers = {&samples, &overview};
  if (spectra) consumers.push_back(&*spectra);
  recording::run_pass(reader, result.range, consumers, context, "reading " + result.recording.file.filename().string());

  result.overview = overview.result();
  if (spectra) result.spectra = spectra->spectra();
  const std::vector<recording::ChannelQuality> qualities = samples.result();
  for (std::size_t c = 0; c < result.recording.channels.size(); ++c) {
    ChannelCheck each{result.recording.channels[c], Verdict::good, qualities[c], qualities[c].findings};
    if (!result.spectra.empty() && each.channel.role == recording::Role::vibration &&
        !result.spectra[c].density.empty()) {
      for (Finding& finding : spectral::spectral_findings(result.spectra[c], each.channel, request.line_frequency_hz)) {
        each.findings.push_back(std::move(finding));
      }
    }
    result.channels.push_back(std::move(each));
  }
  judge_tachos(result.channels, reader, result.range, request, context);
  judge_likeness(result.channels, result.spectra);
  judge_units(result.channels, result.spectra);
  for (ChannelCheck& each : result.channels) {
    blame_the_cause(each.findings);
    each.verdict = worst(each.findings, each.channel.role);
    const recording::ChannelQuality& quality = each.quality;
    if (static_cast<double>(quality.missing) > most_missing * static_cast<double>(quality.missing + quality.samples)) {
      each.verdict = Verdict::unusable;
    }
  }
  for (const Finding& finding : result.recording.findings) {
    const auto owner = std::find_if(result.channels.begin(), result.channels.end(), [&](const ChannelCheck& each) {
      return !finding.channel.empty() && each.channel.name == finding.channel;
    });
    if (owner == result.channels.end()) {
      result.findings.push_back(finding);
    } else {
      owner->findings.push_back(finding);
      owner->verdict = std::max(owner->verdict, weight(finding, owner->channel.role));
    }
  }
  result.verdict = worst(result.findings, recording::Role::vibration);
  for (ChannelCheck& each : result.channels) {
    std::stable_sort(each.findings.begin(), each.findings.end(),
                     [](const Finding& a, const Finding& b) { return weight(a) > weight(b); });
    result.verdict = std::max(result.verdict, each.verdict);
  }
  return result;
}

}  // namespace stillmass::step
