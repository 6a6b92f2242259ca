// How far a study is and how fast it goes.
#pragma once

#include <cstdint>
#include <deque>

#include "coordinator/queue/queue.hpp"
#include "coordinator/services/writer.hpp"

namespace holdfast::coordinator {

class Meter {
 public:
  Meter(std::uint64_t points, std::uint64_t points_done) : points_(points), points_done_(points_done) {}

  void landed(std::uint64_t points, const OutcomeCounts& outcomes);
  /// Notes the state of `now`; the rate is taken over the samples of the last ten seconds.
  void sample(Instant now);

  std::uint64_t pointsDone() const { return points_done_; }
  const OutcomeCounts& outcomes() const { return outcomes_; }
  double pointsPerSecond() const;
  double secondsLeft() const;  ///< 0 if not known

 private:
  struct Sample {
    Instant when;
    std::uint64_t points_done;
  };
  std::uint64_t points_, points_done_;
  OutcomeCounts outcomes_{};
  std::deque<Sample> samples_;
};

}  // namespace holdfast::coordinator
