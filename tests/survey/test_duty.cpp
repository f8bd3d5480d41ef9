// Which point the steady recordings of a visit are compared to.
#include <algorithm>
#include <memory>

#include "step/spectrum_signals.hpp"
#include "support/catch.hpp"
#include "survey/duty.hpp"

using namespace stillmass;
using tests::acceleration;
using tests::MemoryChannel;

namespace {

// Steady recordings of the running machine at these points; "b" moves most.
struct Visit {
  survey::SurveyResult result;
  survey::Readers readers;

  void add(const std::vector<std::string>& points, survey::Stage stage = survey::Stage::before) {
    survey::SurveyRecording recording;
    recording.kind = survey::Kind::steady;
    recording.stage = stage;
    recording.running = true;
    std::vector<MemoryChannel> channels;
    for (const std::string& point : points) {
      recording::ChannelSetting setting;
      setting.index = static_cast<int>(channels.size()) + 1;
      setting.point = point;
      recording.open.channels.push_back(setting);
      channels.push_back({point, acceleration(20.0, {{49.7, point == "b" ? 2e-3 : 1e-3, 0.3}}, 0.02, channels.size())});
    }
    result.survey.recordings.push_back(recording);
    readers.push_back(std::make_unique<tests::MemoryReader>(tests::rate, std::move(channels)));
  }

  step::SpectrumResult spectrum(std::size_t recording) {
    return survey::steady_spectrum(result, recording, readers, {});
  }
};

Visit visit() {
  Visit out;
  out.result.survey.machine = *tests::two_pole_fan().machine;
  return out;
}

}  // namespace

TEST_CASE("where one recording has fewer points than the one before, both are compared to a point of both") {
  Visit roved = visit();
  roved.add({"a", "b", "c"});
  roved.add({"a", "b"});
  REQUIRE_FALSE(roved.spectrum(0).shapes.empty());
  CHECK(roved.spectrum(0).shapes.front().shape.reference == "a");
  CHECK(roved.spectrum(1).shapes.front().shape.reference == "a");
}

TEST_CASE("a recording without the common point is asked for no deflection against it") {
  Visit roved = visit();
  roved.add({"a", "b"});
  roved.add({"a", "c"});
  roved.add({"d"}, survey::Stage::after);
  CHECK(roved.spectrum(0).shapes.front().shape.reference == "a");
  CHECK(roved.spectrum(2).refusals.empty());
}
