#include <cmath>
#include <stdexcept>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"

#include "support/catch.hpp"

using namespace stillmass::base;

namespace {

double sum(unsigned threads) {
  Context context;
  context.threads = threads;
  double total = 0.0;
  for_ranges(
      context, 100'003, 64,
      [](std::size_t begin, std::size_t end) {
        double part = 0.0;
        for (std::size_t i = begin; i < end; ++i) part += std::sin(static_cast<double>(i)) * 1e-3;
        return part;
      },
      [&](double part) { total += part; });
  return total;
}

}  // namespace

TEST_CASE("one thread and many give the same bits") {
  const double one = sum(1);
  for (const unsigned threads : {2U, 3U, 8U}) CHECK(sum(threads) == one);
}

TEST_CASE("the fault of the lowest range comes out, once all threads have ended") {
  for (const unsigned threads : {1U, 4U}) {
    Context context;
    context.threads = threads;
    const auto work = [](std::size_t begin, std::size_t) -> int {
      if (begin >= 5) throw std::runtime_error("range " + std::to_string(begin));
      return 0;
    };
    CHECK_THROWS_WITH(for_ranges(context, 100, 1, work, [](int) {}), "range 5");
  }
}

TEST_CASE("a stop request ends the work") {
  std::stop_source source;
  Context context;
  context.threads = 3;
  context.stop = source.get_token();
  int merged = 0;
  const auto merge = [&](int) {
    if (++merged == 3) source.request_stop();
  };
  CHECK_THROWS_AS(for_ranges(
                      context, 1000, 1, [](std::size_t, std::size_t) { return 1; }, merge),
                  Stopped);
  CHECK(merged < 1000);
}

TEST_CASE("no items, no calls") {
  int calls = 0;
  for_ranges(
      Context{}, 0, 8, [](std::size_t, std::size_t) { return 1; }, [&](int) { ++calls; });
  CHECK(calls == 0);
}
