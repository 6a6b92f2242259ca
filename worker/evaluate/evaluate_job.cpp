#include "worker/evaluate/evaluate_job.hpp"

#include <tbb/parallel_for.h>

#include <algorithm>
#include <array>
#include <bit>
#include <chrono>
#include <cstring>
#include <mutex>
#include <set>
#include <tuple>
#include <utility>
#include <vector>

#include "proto/points.hpp"
#include "thermo/evaluator.hpp"

namespace holdfast::worker {

namespace {

using thermo::kTile;

static_assert(std::endian::native == std::endian::little, "columns travel as this processor has them");

/// Why a column is missing at some point that has numbers: (candidate, phase, column, reason), each once.
using Absences = std::set<std::tuple<std::uint32_t, thermo::Phase, int, thermo::Absence>>;

/// The two axes of a plan as a state is given by them.
struct Specification {
  thermo::InputPair pair;
  int first_axis, second_axis;
};

Result<Specification> specificationOf(const v1::Plan& plan) {
  if (plan.axes_size() != 2) return Error{"a plan has two axes"};
  using thermo::InputPair;
  for (const auto pair : {InputPair::T_p, InputPair::T_rho, InputPair::T_beta, InputPair::p_beta})
    for (const int first : {0, 1}) {
      const std::string given =
          "(" + plan.axes(first).quantity() + "," + plan.axes(1 - first).quantity() + ")";
      if (nameOf(pair) == given) return Specification{pair, first, 1 - first};
    }
  return Error{"no state is given by \"" + plan.axes(0).quantity() + "\" and \"" + plan.axes(1).quantity() +
               "\""};
}

/// What the tiles of a job write. Each has its own stretch of every array.
struct Arrays {
  std::vector<std::string> values;    ///< [column], 8 bytes a point
  std::vector<std::string> presence;  ///< [column], a bit a point
  std::string phase, outcome;         ///< a byte a point
};

bool allPresent(const std::string& presence, std::uint32_t points) {
  for (std::uint32_t k = 0; k < points; ++k)
    if (((static_cast<unsigned char>(presence[k / 8]) >> (k % 8)) & 1U) == 0) return false;
  return true;
}

class Prepared final : public PreparedStudy {
 public:
  Prepared(const v1::Plan& plan, Specification specification)
      : plan_(plan), points_(plan_), specification_(specification) {}

  Status build(const thermo::FluidLibrary& library);
  Result<v1::JobResult> evaluate(const v1::LeasedJob& job, const std::atomic<bool>& stop) const override;

 private:
  /// Points of one composition inside one tile.
  void evaluateRun(const plan::Run& run, std::uint64_t job_first, Arrays& arrays, Absences& absences) const;

  const v1::Plan plan_;
  const plan::Points points_;
  const Specification specification_;
  std::vector<thermo::Evaluator> evaluators_;
};

Status Prepared::build(const thermo::FluidLibrary& library) {
  std::vector<thermo::ColumnExpression> columns;
  for (const std::string& text : plan_.columns()) {
    auto parsed = thermo::parseColumn(text);
    if (const auto* fault = std::get_if<thermo::GrammarError>(&parsed))
      return Error{"\"" + text + "\": " + fault->message};
    columns.push_back(std::get<thermo::ColumnExpression>(std::move(parsed)));
  }
  const auto basis = plan_.basis() == v1::BASIS_MOLAR ? thermo::Basis::molar : thermo::Basis::mass;
  const auto beyond =
      plan_.refuse_beyond_validity() ? thermo::BeyondValidity::refuse : thermo::BeyondValidity::compute;
  const auto count = static_cast<std::size_t>(plan_.candidates_size());
  std::vector<std::string> faults(count);
  std::vector<std::shared_ptr<const thermo::Candidate>> made(count);
  tbb::parallel_for(std::size_t{0}, count, [&](std::size_t c) {
    const v1::PlannedCandidate& planned = plan_.candidates(static_cast<int>(c));
    const auto family = thermo::equationFamilyOf(planned.equation());
    if (!family) {
      faults[c] = "\"" + planned.equation() + "\" is no equation";
      return;
    }
    thermo::CandidateSpec spec;
    spec.components.assign(planned.components().begin(), planned.components().end());
    spec.equation = *family;
    const v1::ReferenceState& state = plan_.reference_state();
    spec.reference_state = {state.t(), state.h(), state.s()};
    auto candidate = thermo::makeCandidate(library, spec);
    if (candidate.ok())
      made[c] = *candidate;
    else
      faults[c] = candidate.error().message;
  });
  for (std::size_t c = 0; c < count; ++c) {
    if (!faults[c].empty()) return Error{plan_.candidates(static_cast<int>(c)).label() + ": " + faults[c]};
    evaluators_.emplace_back(made[c], columns, basis, beyond);
  }
  return success();
}

Result<v1::JobResult> Prepared::evaluate(const v1::LeasedJob& job, const std::atomic<bool>& stop) const {
  const auto started = std::chrono::steady_clock::now();
  const std::uint64_t first = job.first_point();
  const std::uint64_t end = first + job.points();
  if (job.points() == 0 || end < first || end > points_.count())
    return Error{"the job lies outside the plan"};
  const auto columns = static_cast<std::size_t>(plan_.columns_size());
  Arrays arrays;
  arrays.values.assign(columns, std::string(std::size_t{job.points()} * sizeof(double), '\0'));
  arrays.presence.assign(columns, std::string((std::size_t{job.points()} + 7) / 8, '\0'));
  arrays.phase.assign(job.points(), '\0');
  arrays.outcome.assign(job.points(), '\0');
  Absences absences;
  std::mutex absences_mutex;
  // Tiles are cut by absolute point number, whatever the job's ends: a result does not depend on the cut.
  const auto tile = [&](std::uint64_t number) {
    if (stop.load(std::memory_order_relaxed)) return;
    const std::uint64_t from = std::max(first, number * kTile);
    const std::uint64_t up_to = std::min(end, (number + 1) * kTile);
    Absences seen;
    for (const plan::Run& run : points_.runs(from, up_to - from)) evaluateRun(run, first, arrays, seen);
    if (seen.empty()) return;
    const std::lock_guard lock(absences_mutex);
    absences.merge(seen);
  };
  const std::uint64_t first_tile = first / kTile;
  const std::uint64_t end_tile = (end - 1) / kTile + 1;
  // Two tiles share a byte of presence bits where a job does not begin at a multiple of 8: a halved job,
  // small.
  if (first % 8 == 0)
    tbb::parallel_for(first_tile, end_tile, tile);
  else
    for (std::uint64_t number = first_tile; number < end_tile; ++number) tile(number);
  if (stop.load(std::memory_order_relaxed)) return Error{"stopped"};

  v1::JobResult result;
  result.set_job(job.job());
  result.set_first_point(first);
  result.set_points(job.points());
  result.set_phase(std::move(arrays.phase));
  result.set_outcome(std::move(arrays.outcome));
  for (std::size_t c = 0; c < columns; ++c) {
    v1::ColumnData& column = *result.add_columns();
    column.set_values(std::move(arrays.values[c]));
    if (!allPresent(arrays.presence[c], job.points())) column.set_presence(std::move(arrays.presence[c]));
  }
  for (const auto& [candidate, phase, column, absence] : absences) {
    v1::AbsentColumn& absent = *result.add_absences();
    absent.set_candidate(candidate);
    absent.set_phase(static_cast<std::uint32_t>(phase));
    absent.set_column(static_cast<std::uint32_t>(column));
    absent.set_reason(std::string(thermo::sentenceOf(absence)));
  }
  result.set_seconds(std::chrono::duration<double>(std::chrono::steady_clock::now() - started).count());
  return result;
}

void Prepared::evaluateRun(const plan::Run& run, std::uint64_t job_first, Arrays& arrays,
                           Absences& absences) const {
  static thread_local thermo::ColumnTile out;
  const thermo::Evaluator& evaluator = evaluators_[run.candidate];
  thermo::InputTile input;
  input.count = static_cast<int>(run.points);
  input.pair = specification_.pair;
  points_.axisValues(specification_.first_axis, run.first_point, run.points, input.first.data());
  points_.axisValues(specification_.second_axis, run.first_point, run.points, input.second.data());
  const std::vector<double> fractions = points_.moleFractions(run.candidate, run.composition_of_candidate);
  thermo::Composition z{};
  std::copy(fractions.begin(), fractions.end(), z.begin());
  if (input.pair == thermo::InputPair::T_rho && plan_.basis() == v1::BASIS_MASS) {
    const double M = evaluator.candidate().model->molarMass(z);
    for (int k = 0; k < input.count; ++k) input.second[k] /= M;
  }
  evaluator.evaluate(input, z, out);

  const auto at = static_cast<std::size_t>(run.first_point - job_first);
  std::array<bool, kTile> numbers;
  for (std::size_t lane = 0; lane < run.points; ++lane) {
    arrays.phase[at + lane] = static_cast<char>(out.phase[lane]);
    arrays.outcome[at + lane] = static_cast<char>(out.outcome[lane]);
    numbers[lane] =
        out.outcome[lane] == thermo::Outcome::ok || out.outcome[lane] == thermo::Outcome::extrapolated;
  }
  for (std::size_t c = 0; c < arrays.values.size(); ++c) {
    char* values = arrays.values[c].data() + at * sizeof(double);
    std::string& presence = arrays.presence[c];
    std::memcpy(values, out.columns.value[c].data(), run.points * sizeof(double));
    for (std::size_t lane = 0; lane < run.points; ++lane) {
      const thermo::Absence absence = out.columns.reason[c][lane];
      if (numbers[lane] && absence == thermo::Absence::none) {
        char& byte = presence[(at + lane) / 8];
        byte = static_cast<char>(static_cast<unsigned char>(byte) | (1U << ((at + lane) % 8)));
        continue;
      }
      std::memset(values + lane * sizeof(double), 0, sizeof(double));
      if (numbers[lane]) absences.emplace(run.candidate, out.phase[lane], static_cast<int>(c), absence);
    }
  }
}

}  // namespace

Result<std::shared_ptr<const PreparedStudy>> PreparedStudy::prepare(const v1::Plan& plan,
                                                                    const thermo::FluidLibrary& library) {
  const auto specification = specificationOf(plan);
  if (!specification) return specification.error();
  auto prepared = std::make_shared<Prepared>(plan, *specification);
  if (Status built = prepared->build(library); !built) return built.error();
  return std::shared_ptr<const PreparedStudy>(std::move(prepared));
}

}  // namespace holdfast::worker
