// The example of the README, compiled, run against a server, and compared with the README's text.
#include "tests/system/optimiser_example.inc"

#include <gtest/gtest.h>

#include <fstream>
#include <iterator>

#include "coordinator/services/coordinator.hpp"
#include "coordinator/services/server.hpp"
#include "tests/support/stand_in.hpp"

namespace holdfast {
namespace {

std::string textOf(const std::string& file) {
  std::ifstream stream(file);
  return {std::istreambuf_iterator<char>(stream), std::istreambuf_iterator<char>()};
}

TEST(OptimiserExample, StandsInTheReadmeAsItIsTested) {
  const std::string readme = textOf(HOLDFAST_SOURCE_DIR "/README.md");
  const std::string example = textOf(HOLDFAST_SOURCE_DIR "/tests/system/optimiser_example.inc");
  ASSERT_FALSE(example.empty());
  EXPECT_NE(readme.find("```cpp\n" + example + "```"), std::string::npos);
}

TEST(OptimiserExample, FindsThePressureOfAWantedDensity) {
  const tests::TemporaryFolder folder;
  auto store = coordinator::Store::open(folder / "store.sqlite");
  ASSERT_TRUE(store.ok());
  auto coordinating = coordinator::Coordinator::start(std::move(*store), tests::library(), {});
  ASSERT_TRUE(coordinating.ok());
  auto server = coordinator::Server::start(**coordinating, tests::library(), {std::nullopt, 1});
  ASSERT_TRUE(server.ok());
  const auto channel = (*server)->inProcessChannel();
  const auto evaluation = v1::Evaluation::NewStub(channel);
  // The check state of Lemmon, McLinden, Wagner (2009), from memory: 300 K, 400 mol/m3, p = 0.84694991 MPa.
  const double M = 0.04409562;
  EXPECT_NEAR(pressureOfDensity(*evaluation, 300, 400 * M), 846949.91, 0.01);
}

}  // namespace
}  // namespace holdfast
