#include "coordinator/program/progress_line.hpp"

#include <unistd.h>

#include <cmath>
#include <cstdio>

#include "thermo/state.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::chrono::seconds kBetweenPlainLines{5};

std::string timeText(double seconds) {
  const auto whole = static_cast<long>(std::ceil(seconds));
  if (whole < 120) return std::to_string(whole) + " s";
  if (whole < 7200) return std::to_string(whole / 60) + " min";
  return std::to_string(whole / 3600) + " h " + std::to_string(whole % 3600 / 60) + " min";
}

}  // namespace

std::string describeOutcomes(const v1::Progress& progress) {
  std::string text;
  for (int code = 0; code < progress.outcomes_size(); ++code) {
    if (progress.outcomes(code) == 0) continue;
    text.append(text.empty() ? "" : ", ").append(std::to_string(progress.outcomes(code))).append(" ");
    text.append(thermo::nameOf(static_cast<thermo::Outcome>(code)));
  }
  return text;
}

std::string describe(const v1::Progress& progress) {
  const double share = progress.points() == 0 ? 1.0
                                              : static_cast<double>(progress.points_done()) /
                                                    static_cast<double>(progress.points());
  std::string text = std::to_string(static_cast<int>(100 * share)) + " %  " +
                     std::to_string(progress.points_done()) + " of " + std::to_string(progress.points()) +
                     " points";
  if (progress.points_per_second() > 0) {
    text += ", " + std::to_string(std::llround(progress.points_per_second())) + " points/s";
    if (progress.seconds_left() > 0) text += ", " + timeText(progress.seconds_left()) + " left";
  }
  if (const std::string outcomes = describeOutcomes(progress); !outcomes.empty()) text += "; " + outcomes;
  if (progress.jobs_failed() > 0) text += "; " + std::to_string(progress.jobs_failed()) + " jobs failed";
  return text;
}

ProgressLine::ProgressLine() : on_terminal_(isatty(STDERR_FILENO) != 0) {}

void ProgressLine::show(const v1::Progress& progress) {
  const auto now = std::chrono::steady_clock::now();
  if (on_terminal_) {
    // Back to the line's start, and clear what was longer (ECMA-48: CR, EL).
    std::fprintf(stderr, "\r%s\033[K", describe(progress).c_str());
    shown_ = true;
  } else if (now - last_ >= kBetweenPlainLines) {
    std::fprintf(stderr, "%s\n", describe(progress).c_str());
    last_ = now;
  }
  std::fflush(stderr);
}

void ProgressLine::end() {
  if (on_terminal_ && shown_) std::fprintf(stderr, "\r\033[K");
  std::fflush(stderr);
}

}  // namespace holdfast::coordinator
