// Jobs: the same bits however a sweep is cut and however many threads compute it.
#include "worker/evaluate/evaluate_job.hpp"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <tbb/task_arena.h>

#include <algorithm>
#include <atomic>
#include <cstring>
#include <set>
#include <stdexcept>
#include <vector>

#include "proto/points.hpp"
#include "thermo/evaluator.hpp"

namespace holdfast::worker {
namespace {

const thermo::FluidLibrary& library() {
  static const Result<thermo::FluidLibrary> loaded =
      thermo::FluidLibrary::load(HOLDFAST_SOURCE_DIR "/thermo/fluids/data");
  if (!loaded.ok()) throw std::runtime_error(loaded.error().message);
  return *loaded;
}

void addCandidate(v1::Plan& plan, const std::string& equation, const std::vector<std::string>& components) {
  v1::PlannedCandidate& candidate = *plan.add_candidates();
  candidate.set_label(components.size() == 1 ? components[0] : "blend");
  candidate.set_equation(equation);
  for (const auto& name : components) {
    candidate.add_components(name);
    candidate.add_molar_mass((*library().find(name))->M);
  }
  if (components.size() == 1)
    candidate.mutable_fixed()->add_mole_fraction(1);
  else
    candidate.mutable_lattice()->set_steps(3);
}

/// A pure fluid and a lattice, 23 x 31 states each composition: compositions end inside tiles, and some
/// points are refused.
v1::Plan plan() {
  v1::Plan plan;
  plan.set_name("jobs");
  plan.set_basis(v1::BASIS_MASS);
  plan.mutable_reference_state()->set_t(273.15);
  plan.mutable_reference_state()->set_h(200e3);
  plan.mutable_reference_state()->set_s(1e3);
  addCandidate(plan, "reference", {"R-290"});
  addCandidate(plan, "peng-robinson", {"R-290", "R-600a"});
  v1::PlannedAxis& T = *plan.add_axes();
  T.set_quantity("T");
  for (int k = 0; k < 23; ++k) T.add_values(230 + 9.0 * k);
  v1::PlannedAxis& p = *plan.add_axes();
  p.set_quantity("p");
  for (int k = 0; k < 31; ++k) p.add_values(k == 30 ? -1.0 : 1e5 * (1 + k));
  for (const char* column : {"rho", "cp", "w", "x[R-290]", "(dh/dp)_T", "(dp/dT)_sat"})
    plan.add_columns(column);
  plan.set_points(5 * 23 * 31);
  plan.set_points_per_job(512);
  return plan;
}

struct Row {
  std::vector<std::uint64_t> bits;  ///< of the values, or all ones where one is absent
  char phase, outcome;
  bool operator==(const Row&) const = default;
};

std::vector<Row> rowsOf(const v1::JobResult& result) {
  std::vector<Row> rows(result.points());
  for (std::size_t k = 0; k < rows.size(); ++k) {
    rows[k].phase = result.phase()[k];
    rows[k].outcome = result.outcome()[k];
    for (const v1::ColumnData& column : result.columns()) {
      const bool there = column.presence().empty() ||
                         ((static_cast<unsigned char>(column.presence()[k / 8]) >> (k % 8)) & 1U) != 0;
      std::uint64_t bits = ~std::uint64_t{0};
      if (there) std::memcpy(&bits, column.values().data() + 8 * k, 8);
      rows[k].bits.push_back(bits);
    }
  }
  return rows;
}

/// The whole plan in jobs of `points`, computed by `threads`.
std::vector<Row> sweep(const PreparedStudy& study, std::uint64_t all, std::uint32_t points, int threads) {
  std::vector<Row> rows;
  const std::atomic<bool> stop{false};
  tbb::task_arena arena(threads);
  for (std::uint64_t first = 0; first < all; first += points) {
    v1::LeasedJob job;
    job.set_first_point(first);
    job.set_points(static_cast<std::uint32_t>(std::min<std::uint64_t>(points, all - first)));
    arena.execute([&] {
      const auto result = study.evaluate(job, stop);
      if (!result.ok()) throw std::runtime_error(result.error().message);
      for (Row& row : rowsOf(*result)) rows.push_back(std::move(row));
    });
  }
  return rows;
}

TEST(Jobs, GiveTheSameBitsHoweverTheyAreCutAndByHowManyThreads) {
  const auto study = PreparedStudy::prepare(plan(), library());
  ASSERT_TRUE(study.ok()) << study.error().message;
  const std::uint64_t all = plan().points();
  const auto whole = sweep(**study, all, 1U << 20U, 1);
  EXPECT_EQ(whole.size(), all);
  EXPECT_EQ(sweep(**study, all, 64, 1), whole);
  EXPECT_EQ(sweep(**study, all, 512, 3), whole);
  EXPECT_EQ(sweep(**study, all, 1U << 20U, 4), whole);
}

TEST(Jobs, SayTheSameAsTheEvaluatorItself) {
  const v1::Plan whole = plan();
  const auto study = PreparedStudy::prepare(whole, library());
  ASSERT_TRUE(study.ok());
  const auto rows = sweep(**study, 64, 64, 1);
  thermo::CandidateSpec spec;
  spec.components = {"R-290"};
  std::vector<thermo::ColumnExpression> columns;
  for (const auto& text : whole.columns())
    columns.push_back(std::get<thermo::ColumnExpression>(thermo::parseColumn(text)));
  const thermo::Evaluator evaluator(*thermo::makeCandidate(library(), spec), columns, thermo::Basis::mass,
                                    thermo::BeyondValidity::compute);
  const plan::Points points(whole);
  thermo::InputTile input;
  input.count = 64;
  input.pair = thermo::InputPair::T_p;
  points.axisValues(0, 0, 64, input.first.data());
  points.axisValues(1, 0, 64, input.second.data());
  thermo::ColumnTile out;
  evaluator.evaluate(input, {1}, out);
  for (int k = 0; k < 64; ++k) {
    const auto lane = static_cast<std::size_t>(k);
    EXPECT_EQ(rows[lane].outcome, static_cast<char>(out.outcome[lane]));
    EXPECT_EQ(rows[lane].phase, static_cast<char>(out.phase[lane]));
    for (std::size_t c = 0; c < columns.size(); ++c) {
      if (rows[lane].bits[c] == ~std::uint64_t{0}) continue;
      double value = 0;
      std::memcpy(&value, &rows[lane].bits[c], 8);
      EXPECT_EQ(value, out.columns.value[c][k]);
    }
  }
  // The last pressure is negative: no numbers there, and a column along saturation nowhere.
  EXPECT_EQ(rows[30].outcome, static_cast<char>(thermo::Outcome::out_of_range));
  EXPECT_EQ(rows[30].bits[0], ~std::uint64_t{0});
  EXPECT_EQ(rows[0].bits[5], ~std::uint64_t{0});
}

TEST(Jobs, NameEachReasonOnce) {
  const auto study = PreparedStudy::prepare(plan(), library());
  ASSERT_TRUE(study.ok());
  v1::LeasedJob job;
  job.set_points(static_cast<std::uint32_t>(plan().points()));
  const std::atomic<bool> stop{false};
  const auto result = (*study)->evaluate(job, stop);
  ASSERT_TRUE(result.ok());
  std::set<std::string> seen;
  for (const v1::AbsentColumn& absent : result->absences()) {
    EXPECT_FALSE(absent.reason().empty());
    const std::string key = std::to_string(absent.candidate()) + "/" + std::to_string(absent.phase()) + "/" +
                            std::to_string(absent.column()) + "/" + absent.reason();
    EXPECT_TRUE(seen.insert(key).second) << key;
  }
  EXPECT_FALSE(seen.empty());
}

TEST(Jobs, StopWhenToldAndRefuseWhatLiesOutside) {
  const auto study = PreparedStudy::prepare(plan(), library());
  ASSERT_TRUE(study.ok());
  v1::LeasedJob job;
  job.set_points(64);
  const std::atomic<bool> stop{true};
  EXPECT_EQ((*study)->evaluate(job, stop).error().message, "stopped");
  const std::atomic<bool> go{false};
  job.set_first_point(plan().points());
  EXPECT_FALSE((*study)->evaluate(job, go).ok());
}

TEST(Jobs, APlanThatCannotBeBuiltSaysWhichCandidate) {
  v1::Plan wrong = plan();
  wrong.mutable_candidates(1)->set_equation("reference");
  const auto study = PreparedStudy::prepare(wrong, library());
  ASSERT_FALSE(study.ok());
  EXPECT_THAT(study.error().message, testing::HasSubstr("blend: blends of reference equations"));
}

}  // namespace
}  // namespace holdfast::worker
