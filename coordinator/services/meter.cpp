#include "coordinator/services/meter.hpp"

namespace holdfast::coordinator {

void Meter::landed(std::uint64_t points, const OutcomeCounts& outcomes) {
  points_done_ += points;
  for (std::size_t i = 0; i < outcomes.size(); ++i) outcomes_[i] += outcomes[i];
}

void Meter::sample(Instant now) {
  samples_.push_back({now, points_done_});
  while (samples_.size() > 2 && samples_[1].when + std::chrono::seconds(10) <= now) samples_.pop_front();
}

double Meter::pointsPerSecond() const {
  if (samples_.size() < 2) return 0;
  const std::chrono::duration<double> time = samples_.back().when - samples_.front().when;
  if (time.count() <= 0) return 0;
  return static_cast<double>(samples_.back().points_done - samples_.front().points_done) / time.count();
}

double Meter::secondsLeft() const {
  const double rate = pointsPerSecond();
  return rate > 0 ? static_cast<double>(points_ - points_done_) / rate : 0;
}

}  // namespace holdfast::coordinator
