// A study that needs no thermodynamics: every value follows from its point number, so that a test knows what
// must be in the store to the bit, and can make any point misbehave.
#pragma once

#include <sqlite3.h>

#include <cstring>
#include <filesystem>
#include <functional>
#include <memory>
#include <stdexcept>
#include <string>
#include <vector>

#include "coordinator/store/store.hpp"
#include "coordinator/study/study.hpp"
#include "holdfast.pb.h"
#include "proto/build_identity.hpp"
#include "thermo/fluids/library.hpp"
#include "worker/evaluate/evaluate_job.hpp"
#include "worker/join/join.hpp"

namespace holdfast::tests {

inline std::shared_ptr<const thermo::FluidLibrary> library() {
  static const auto loaded = [] {
    auto read = thermo::FluidLibrary::load(*thermo::FluidLibrary::findFolder());
    if (!read.ok()) throw std::runtime_error(read.error().message);
    return std::make_shared<const thermo::FluidLibrary>(std::move(*read));
  }();
  return loaded;
}

/// `name`, with 100 pressures at each of `temperatures` temperatures, in jobs of 128 points.
inline v1::Plan standInPlan(const std::string& name, int temperatures) {
  v1::Plan plan;
  plan.set_name(name);
  plan.set_basis(v1::BASIS_MASS);
  plan.mutable_reference_state()->set_t(273.15);
  v1::PlannedCandidate& candidate = *plan.add_candidates();
  candidate.set_label("R-290");
  candidate.set_equation("reference");
  candidate.add_components("R-290");
  candidate.add_molar_mass(0.0440956);
  candidate.mutable_fixed()->add_mole_fraction(1);
  v1::PlannedAxis& T = *plan.add_axes();
  T.set_quantity("T");
  for (int i = 0; i < temperatures; ++i) T.add_values(200 + i);
  v1::PlannedAxis& p = *plan.add_axes();
  p.set_quantity("p");
  for (int i = 0; i < 100; ++i) p.add_values(1000.0 * (i + 1));
  plan.add_columns("rho");
  plan.add_columns("h");
  plan.set_points(static_cast<std::uint64_t>(temperatures) * 100);
  plan.set_points_per_job(128);
  return plan;
}

inline double standInValue(std::uint64_t point, int column) {
  return 0.1 * static_cast<double>(point) + 1e6 * column;
}

/// Puts the plan into a new store, all of it waiting.
inline void seedStore(const std::filesystem::path& file, const v1::Plan& plan) {
  auto store = coordinator::Store::open(file);
  if (!store.ok()) throw std::runtime_error(store.error().message);
  const std::vector<coordinator::CandidateFacts> facts(1,
                                                       {"pure", {{"saturated liquid", 273.15, 200e3, 1e3}}});
  const auto added = store->add(plan, coordinator::identityOf(plan, *library(), buildIdentity()), "",
                                buildIdentity(), *library(), facts);
  if (!added.ok()) throw std::runtime_error(added.error().message);
}

/// What a test does to a job before it is computed; an Error becomes the job's.
using Mischief = std::function<Status(const v1::LeasedJob& job, const std::atomic<bool>& stop)>;

inline v1::JobResult standInResult(const v1::LeasedJob& job, int columns) {
  v1::JobResult result;
  result.set_job(job.job());
  result.set_first_point(job.first_point());
  result.set_points(job.points());
  result.mutable_phase()->assign(job.points(), '\1');
  result.mutable_outcome()->assign(job.points(), '\0');
  for (int c = 0; c < columns; ++c) {
    std::string& values = *result.add_columns()->mutable_values();
    values.resize(job.points() * sizeof(double));
    for (std::uint32_t k = 0; k < job.points(); ++k) {
      const double value = standInValue(job.first_point() + k, c);
      std::memcpy(values.data() + k * sizeof(double), &value, sizeof(double));
    }
  }
  return result;
}

class StandInStudy final : public worker::PreparedStudy {
 public:
  StandInStudy(int columns, Mischief mischief) : columns_(columns), mischief_(std::move(mischief)) {}

  Result<v1::JobResult> evaluate(const v1::LeasedJob& job, const std::atomic<bool>& stop) const override {
    if (mischief_)
      if (const Status done = mischief_(job, stop); !done.ok()) return done.error();
    if (stop) return Error{"stopped"};
    return standInResult(job, columns_);
  }

 private:
  int columns_;
  Mischief mischief_;
};

inline worker::Prepare standIn(Mischief mischief = {}) {
  return [mischief](const v1::Plan& plan,
                    const thermo::FluidLibrary&) -> Result<std::shared_ptr<const worker::PreparedStudy>> {
    return std::shared_ptr<const worker::PreparedStudy>(
        std::make_shared<StandInStudy>(plan.columns_size(), mischief));
  };
}

/// A row of points_<study>: NULL is an empty text, numbers are printed with all their digits.
using Row = std::vector<std::string>;

/// What a query says, row after row.
inline std::vector<Row> query(const std::filesystem::path& file, const std::string& sql) {
  sqlite3* database = nullptr;
  sqlite3_stmt* statement = nullptr;
  std::vector<Row> rows;
  // The store may be in the middle of being made: wait.
  if (sqlite3_open_v2(file.c_str(), &database, SQLITE_OPEN_READWRITE, nullptr) != SQLITE_OK ||
      sqlite3_busy_timeout(database, 10'000) != SQLITE_OK ||
      sqlite3_prepare_v2(database, sql.c_str(), -1, &statement, nullptr) != SQLITE_OK) {
    const std::string wrong = sqlite3_errmsg(database);
    sqlite3_close(database);
    throw std::runtime_error(sql + ": " + wrong);
  }
  while (sqlite3_step(statement) == SQLITE_ROW) {
    Row row;
    for (int c = 0; c < sqlite3_column_count(statement); ++c) {
      if (sqlite3_column_type(statement, c) == SQLITE_FLOAT) {
        std::array<char, 40> text{};
        std::snprintf(text.data(), text.size(), "%a", sqlite3_column_double(statement, c));
        row.emplace_back(text.data());
      } else {
        const auto* text = reinterpret_cast<const char*>(sqlite3_column_text(statement, c));
        row.emplace_back(text == nullptr ? "" : text);
      }
    }
    rows.push_back(std::move(row));
  }
  sqlite3_finalize(statement);
  sqlite3_close(database);
  return rows;
}

inline std::string hex(double value) {
  std::array<char, 40> text{};
  std::snprintf(text.data(), text.size(), "%a", value);
  return text.data();
}

/// What is wrong with the rows of a stand-in study; empty if every point is there once with its values.
inline std::string faultsOf(const std::filesystem::path& file, const v1::Plan& plan,
                            std::vector<std::uint64_t> crashed = {}) {
  const auto rows =
      query(file, "SELECT point, rho, h, outcome FROM points_" + plan.name() + " ORDER BY point");
  if (rows.size() != plan.points())
    return std::to_string(rows.size()) + " rows, not " + std::to_string(plan.points());
  for (std::uint64_t point = 0; point < rows.size(); ++point) {
    Row wanted{std::to_string(point), hex(standInValue(point, 0)), hex(standInValue(point, 1)), "0"};
    for (const std::uint64_t one : crashed)
      if (one == point) wanted = {std::to_string(point), "", "", "7"};
    if (rows[point] != wanted) return "point " + std::to_string(point) + " is wrong";
  }
  const auto check = query(file, "PRAGMA integrity_check");
  return check == std::vector<Row>{{"ok"}} ? "" : check.at(0).at(0);
}

/// A folder of its own, gone with the object.
class TemporaryFolder {
 public:
  TemporaryFolder() {
    std::string pattern = (std::filesystem::temp_directory_path() / "holdfast-XXXXXX").string();
    if (mkdtemp(pattern.data()) == nullptr) throw std::runtime_error("no temporary folder");
    path_ = pattern;
  }
  ~TemporaryFolder() {
    std::error_code ignored;
    std::filesystem::remove_all(path_, ignored);
  }
  TemporaryFolder(const TemporaryFolder&) = delete;
  TemporaryFolder& operator=(const TemporaryFolder&) = delete;
  std::filesystem::path operator/(const std::string& name) const { return path_ / name; }
  const std::filesystem::path& path() const { return path_; }

 private:
  std::filesystem::path path_;
};

}  // namespace holdfast::tests
