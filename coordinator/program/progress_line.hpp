// Progress for people.
#pragma once

#include <chrono>
#include <cstdint>
#include <string>

#include "holdfast.pb.h"

namespace holdfast::coordinator {

/// "62 %  12326 of 19881 points, 41000 points/s, 3 s left; 12000 ok, 326 splits"
std::string describe(const v1::Progress& progress);

/// "12000 ok, 326 splits"; empty if nothing was counted.
std::string describeOutcomes(const v1::Progress& progress);

/// Shows progress on standard error: on a terminal one line that is written over, else a line now and then.
class ProgressLine {
 public:
  ProgressLine();
  void show(const v1::Progress& progress);
  /// Clears the line of a terminal; what follows starts on an empty one.
  void end();

 private:
  bool on_terminal_;
  bool shown_ = false;
  std::chrono::steady_clock::time_point last_{};
};

}  // namespace holdfast::coordinator
