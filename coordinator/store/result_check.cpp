#include <string>

#include "coordinator/store/store.hpp"
#include "thermo/state.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::uint8_t kLastPhase = static_cast<std::uint8_t>(thermo::Phase::supercritical);

Error misfit(const v1::JobResult& result, const std::string& why) {
  return Error{"the result of job " + std::to_string(result.job()) + " is malformed: " + why};
}

std::string count(std::size_t have, const char* what, std::size_t expected) {
  return std::to_string(have) + " " + what + " where " + std::to_string(expected) + " belong";
}

bool hasNumbers(std::uint8_t outcome) {
  return outcome == static_cast<std::uint8_t>(thermo::Outcome::ok) ||
         outcome == static_cast<std::uint8_t>(thermo::Outcome::extrapolated);
}

/// Neither infinite nor not a number, read from the exponent of a packed little-endian double.
bool isFinite(const char* packed) {
  const auto low = static_cast<unsigned char>(packed[6]), high = static_cast<unsigned char>(packed[7]);
  return (high & 0x7Fu) != 0x7Fu || (low & 0xF0u) != 0xF0u;
}

Status checkColumn(const v1::Plan& plan, const v1::JobResult& result, int c) {
  const v1::ColumnData& column = result.columns(c);
  const std::string named = "column " + plan.columns(c);
  const std::size_t points = result.points();
  if (column.values().size() != points * sizeof(double))
    return misfit(result, named + " has " + count(column.values().size(), "bytes", points * sizeof(double)));
  const std::string& presence = column.presence();
  if (!presence.empty() && presence.size() != (points + 7) / 8)
    return misfit(result, named + " has " + count(presence.size(), "presence bytes", (points + 7) / 8));
  for (std::size_t k = 0; k < points; ++k) {
    if (!presence.empty() && (static_cast<unsigned char>(presence[k / 8]) >> (k % 8) & 1U) == 0) continue;
    if (!hasNumbers(static_cast<std::uint8_t>(result.outcome()[k])))
      return misfit(result, named + " has a value at point " + std::to_string(result.first_point() + k) +
                                ", whose outcome has no numbers");
    if (!isFinite(column.values().data() + k * sizeof(double)))
      return misfit(result, named + " has a value that is not finite at point " +
                                std::to_string(result.first_point() + k));
  }
  return success();
}

}  // namespace

Status checkResult(const v1::Plan& plan, const v1::JobResult& result) {
  const std::size_t points = result.points();
  if (points == 0) return misfit(result, "it has no points");
  if (result.first_point() >= plan.points() || points > plan.points() - result.first_point())
    return misfit(result, "its points are not all in the study");
  if (result.phase().size() != points) return misfit(result, count(result.phase().size(), "phases", points));
  if (result.outcome().size() != points)
    return misfit(result, count(result.outcome().size(), "outcomes", points));
  for (const char phase : result.phase())
    if (static_cast<std::uint8_t>(phase) > kLastPhase)
      return misfit(result, "no phase has code " + std::to_string(static_cast<std::uint8_t>(phase)));
  for (const char outcome : result.outcome())
    if (static_cast<std::uint8_t>(outcome) >= thermo::kOutcomes)
      return misfit(result, "no outcome has code " + std::to_string(static_cast<std::uint8_t>(outcome)));
  if (result.columns_size() != plan.columns_size())
    return misfit(result, count(static_cast<std::size_t>(result.columns_size()), "columns",
                                static_cast<std::size_t>(plan.columns_size())));
  for (int c = 0; c < result.columns_size(); ++c)
    if (Status column = checkColumn(plan, result, c); !column) return column;
  for (const v1::AbsentColumn& absent : result.absences()) {
    if (absent.candidate() >= static_cast<std::uint32_t>(plan.candidates_size()) ||
        absent.column() >= static_cast<std::uint32_t>(plan.columns_size()) || absent.phase() > kLastPhase)
      return misfit(result, "an absence names a candidate, phase or column that is not there");
    if (absent.reason().empty()) return misfit(result, "an absence gives no reason");
  }
  return success();
}

}  // namespace holdfast::coordinator
