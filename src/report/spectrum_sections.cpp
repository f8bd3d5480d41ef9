#include <cctype>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/report/charts_signal.hpp"
#include "stillmass/report/sentences.hpp"

#include "report/sections.hpp"
#include "report/spectrum_sentences.hpp"

// The pieces of a page that show spectra.
namespace stillmass::report {
namespace {

Table table(std::string caption, Rows rows) {
  Table out;
  out.caption = std::move(caption);
  out.header = std::move(rows.header);
  out.rows = std::move(rows.rows);
  return out;
}

std::string ended(std::string sentence) {
  if (!sentence.empty())
    sentence.front() = static_cast<char>(std::toupper(static_cast<unsigned char>(sentence.front())));
  return sentence + ".";
}

void add_channel(std::vector<Block>& blocks, const step::SpectrumResult& result, const step::ChannelSpectrum& each,
                 const SpectrumView& view) {
  blocks.emplace_back(spectrum_chart(result, each, view.density));
  const std::string overall = overall_sentence(result, each);
  Table peaks = table(each.channel.name + (overall.empty() ? "" : ": " + overall), peak_rows(result, each, false));
  for (const std::string& note : judgements(each)) peaks.notes.push_back(ended(note));
  if (!each.severity) peaks.notes.push_back("No severity zone: " + sentence(each.severity.refusal()) + ".");
  if (each.severity) peaks.notes.push_back("Source of the limits: " + each.severity->limits.source + ".");
  if (const std::string features = features_sentence(each); !features.empty()) peaks.notes.push_back(ended(features));
  blocks.emplace_back(std::move(peaks));
  if (each.zoom) blocks.emplace_back(zoom_chart(result, each));
  if (each.synchronous) {
    blocks.emplace_back(waveform_chart(each));
    blocks.emplace_back(table("Synchronous with the shaft", synchronous_rows(result, each)));
  }
  if (each.envelope) {
    if (each.envelope->envelope) blocks.emplace_back(envelope_chart(result, each));
    Table lines = table("Envelope at " + each.channel.name, envelope_rows(*each.envelope));
    lines.notes.push_back(ended(envelope_sentence(*each.envelope)));
    if (each.envelope->peaks.empty()) {
      blocks.emplace_back(Paragraph{lines.notes.front()});
    } else {
      blocks.emplace_back(std::move(lines));
    }
  }
  if (view.third_octaves && !each.third_octaves.bands.empty()) {
    blocks.emplace_back(third_octave_chart(result, each));
  }
  for (Block& block : finding_blocks(each.findings)) blocks.push_back(std::move(block));
}

}  // namespace

std::vector<Block> spectrum_blocks(const step::SpectrumResult& result, const SpectrumView& view) {
  std::vector<Block> blocks;
  std::string how = ended(blocks_sentence(result));
  if (const std::string speed = speed_sentence(result); !speed.empty()) how += " Running speed " + speed + ".";
  blocks.emplace_back(Paragraph{how + " " + uncertainty_note(result)});
  for (const step::ChannelSpectrum& each : result.channels) {
    if (!each.shown.density.empty()) {
      add_channel(blocks, result, each, view);
    } else {
      for (Block& block : finding_blocks(each.findings)) blocks.push_back(std::move(block));
    }
  }
  const auto families = family_sentences(result);
  if (!families.empty()) {
    blocks.emplace_back(Paragraph{"Found without the speed:"});
    blocks.emplace_back(Bullets{families, false});
  }
  for (const base::Refusal& each : result.refusals) {
    blocks.emplace_back(Caution{Tone::caution, "Not answered", ended(sentence(each))});
  }
  return blocks;
}

std::vector<Block> deflection_blocks(const std::vector<step::OperatingDeflection>& shapes) {
  std::vector<Block> blocks;
  if (shapes.empty()) return blocks;
  Table out = table("Ratio to the reference point and phase lead, at each forcing frequency", deflection_rows(shapes));
  for (const std::string& note : deflection_notes(shapes)) out.notes.push_back(ended(note));
  blocks.emplace_back(std::move(out));
  return blocks;
}

std::vector<Block> cause_blocks(const std::vector<base::Finding>& causes) {
  std::vector<Block> blocks;
  for (const base::Finding& each : causes) {
    if (each.evidence.empty()) continue;
    blocks.emplace_back(Caution{each.strength == base::Strength::weak ? Tone::neutral : Tone::caution, each.channel,
                                ended(cause_sentence(each))});
    Details details;
    details.summary = "Evidence, and what would confirm or refute it";
    const auto add = [&](const char* label, const std::vector<std::string>& items) {
      if (items.empty()) return;
      details.blocks.emplace_back(Paragraph{label});
      details.blocks.emplace_back(Bullets{items, false});
    };
    add("Seen:", each.evidence);
    add("Would confirm it:", each.confirm);
    add("Would refute it:", each.refute);
    blocks.emplace_back(std::move(details));
  }
  return blocks;
}

}  // namespace stillmass::report
