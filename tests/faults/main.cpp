// The tests of faults, and in the same program a worker that dies of one point: the product has no such
// thing.
#include <gtest/gtest.h>
#include <unistd.h>

#include <string>
#include <string_view>

#include "tests/support/stand_in.hpp"

namespace {

/// Joins ADDRESS and computes stand-in results, a millisecond each; the process dies when a job has POINT.
int workUntilPoisoned(const std::string& address, std::uint64_t poison) {
  using namespace holdfast;
  const worker::Leaving leaving;
  worker::JoinOptions options{"a stand-in", 1,
                              tests::standIn([poison](const v1::LeasedJob& job, const auto&) {
                                if (job.first_point() <= poison && poison < job.first_point() + job.points())
                                  _exit(3);
                                usleep(1000);
                                return success();
                              })};
  return worker::serve(worker::channelTo(address), tests::library(), options, leaving).ok() ? 0 : 1;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc == 4 && std::string_view(argv[1]) == "--worker")
    return workUntilPoisoned(argv[2], std::stoull(argv[3]));
  testing::InitGoogleTest(&argc, argv);
  return RUN_ALL_TESTS();
}
