// A spectrum's outputs where channels share a name or have no valid samples.
#include <algorithm>
#include <set>

#include "stillmass/report/result_csv.hpp"
#include "stillmass/report/result_page.hpp"

#include "report/spectrum_sentences.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

step::ChannelSpectrum channel(const std::string& name, std::size_t blocks) {
  step::ChannelSpectrum out;
  out.channel.name = name;
  out.measured.line_hz = 0.5;
  out.measured.rate_hz = 4.0;
  out.measured.noise_bandwidth_hz = 0.75;
  out.measured.blocks = blocks;
  out.measured.effective_averages = static_cast<double>(blocks);
  if (blocks > 0) out.measured.density = {0.0, 1.0, 1.0, 1.0, 1.0};
  out.shown = out.measured;
  return out;
}

}  // namespace

TEST_CASE("channels whose names make one file name have files of their own") {
  step::SpectrumResult result;
  result.channels = {channel("a b", 4), channel("a b", 4), channel("a/b", 4)};
  std::set<std::string> names;
  const auto files = report::csv(result);
  for (const report::NamedText& file : files) {
    CAPTURE(file.name);
    CHECK(names.insert(file.name).second);
  }
  CHECK(names.contains("spectrum-a-b.csv"));
  CHECK(names.contains("spectrum-a-b-3.csv"));
}

TEST_CASE("a first channel without a block does not speak for the others") {
  step::SpectrumResult result;
  result.channels = {channel("dead", 0), channel("good", 4)};
  CHECK(report::blocks_sentence(result).find("4 blocks") != std::string::npos);
}

TEST_CASE("the page says why a channel has no spectrum") {
  step::SpectrumResult result;
  result.channels = {channel("dead", 0)};
  result.channels.front().findings.push_back({base::Code::missing_values, "no block of valid samples", "dead"});
  const std::string html = report::html(report::page(report::Envelope{}, result, report::SpectrumView{}));
  CHECK(html.find("no block of valid samples") != std::string::npos);
}
