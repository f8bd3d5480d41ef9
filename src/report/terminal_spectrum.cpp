#include <algorithm>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/sentences.hpp"
#include "stillmass/report/terminal.hpp"

#include "report/spectrum_sentences.hpp"
#include "report/terminal_parts.hpp"

namespace stillmass::report {
namespace {

std::string table(Rows rows) {
  for (auto& row : rows.rows) {
    for (std::string& cell : row) cell = base::printable(cell);
  }
  return aligned(rows.header, rows.rows);
}

std::string indented(const std::string& text) { return "  " + wrapped(base::printable(text), screen - 4, 4) + "\n"; }

std::string channel_text(const step::SpectrumResult& result, const step::ChannelSpectrum& channel,
                         const SpectrumView& view) {
  std::string out = base::printable(channel.channel.name);
  const std::string overall = overall_sentence(result, channel);
  out += overall.empty() ? "\n" : ": " + overall + "\n";
  for (const std::string& each : judgements(channel)) out += indented(each);
  if (const std::string features = features_sentence(channel); !features.empty()) out += indented(features);
  const Rows peaks = peak_rows(result, channel, view.density);
  const bool is_searched = channel.measured.averaging != spectral::Averaging::peak_hold;
  const char* nothing =
      is_searched ? "  no line stands out of the noise\n" : "  a peak hold is not searched for lines\n";
  out += peaks.rows.empty() ? nothing : table(peaks);
  if (channel.zoom) out += indented(zoom_sentence(channel)) + table(zoom_rows(result, channel));
  if (channel.synchronous) {
    const rotation::SynchronousAverage& average = *channel.synchronous;
    std::string text = fmt::format("synchronous average of {} blocks of {} turn{}", average.blocks,
                                   average.turns_per_block, average.turns_per_block == 1 ? "" : "s");
    if (average.synchronous_share) {
      text +=
          fmt::format(": {} % of the power repeats with the shaft", base::rounded(*average.synchronous_share * 100.0));
    }
    out += indented(text) + table(synchronous_rows(result, channel));
  }
  if (channel.envelope) {
    out += indented(envelope_sentence(*channel.envelope));
    if (!channel.envelope->peaks.empty()) out += table(envelope_rows(*channel.envelope));
  }
  if (view.third_octaves) {
    out += table(third_octave_rows(result, channel));
    if (channel.third_octaves.unresolved > 0) {
      out += indented(fmt::format("{} lower bands are not resolved by these lines", channel.third_octaves.unresolved));
    }
  }
  return out;
}

// So many columns as fit on the screen, one table below the other.
std::string deflection_tables(const std::vector<step::OperatingDeflection>& shapes) {
  constexpr std::size_t columns = 3;
  std::string out;
  for (std::size_t i = 0; i < shapes.size(); i += columns) {
    const auto begin = shapes.begin() + static_cast<std::ptrdiff_t>(i);
    const auto end = shapes.begin() + static_cast<std::ptrdiff_t>(std::min(i + columns, shapes.size()));
    out += table(deflection_rows({begin, end}));
  }
  return out;
}

}  // namespace

std::string text(const step::SpectrumResult& result, const SpectrumView& view) {
  std::string out = heading(result.recording);
  if (const std::string blocks = blocks_sentence(result); !blocks.empty()) out += indented(blocks);
  if (const std::string speed = speed_sentence(result); !speed.empty()) out += indented("running speed " + speed);
  std::vector<base::Finding> all = result.findings;
  for (const step::ChannelSpectrum& each : result.channels) {
    out += "\n" + channel_text(result, each, view);
    all.insert(all.end(), each.findings.begin(), each.findings.end());
  }
  if (result.worst && result.channels.size() > 1) {
    out += fmt::format("\nWorst: {}\n", base::printable(result.channels[*result.worst].channel.name));
  }
  const auto families = family_sentences(result);
  if (!families.empty()) {
    out += "\nFound without the speed:\n";
    for (const std::string& each : families) out += bullet(base::printable(each));
  }
  if (!result.shapes.empty()) {
    out += "\nHow it moves (ratio to the reference, phase lead):\n" + deflection_tables(result.shapes);
    for (const std::string& each : deflection_notes(result.shapes)) out += bullet(base::printable(each));
  }
  if (!result.causes.empty()) {
    out += "\nWhat drives it:\n" + cause_lines(result.causes);
  } else if (!result.forcing.empty()) {
    std::vector<const step::ChannelSpectrum*> channels;
    for (const step::ChannelSpectrum& each : result.channels) channels.push_back(&each);
    const std::string line = largest_line_sentence(channels);
    if (!line.empty()) out += "\nWhat drives it:\n" + bullet(base::printable(line));
  }
  if (!result.refusals.empty()) {
    out += "\nNot answered:\n";
    for (const base::Refusal& each : result.refusals) out += bullet(base::printable(sentence(each)));
  }
  out += "\n" + wrapped(uncertainty_note(result), screen, 0) + "\n";
  return out + (all.empty() ? "" : "\n" + finding_lines(all));
}

}  // namespace stillmass::report
