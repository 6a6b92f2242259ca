// Every first partial of the algebra against differentiation of A at 50 digits, in single-phase states and on
// the pure hull.
#include <gtest/gtest.h>

#include <cmath>

#include "tests/thermo/evaluator/truth.hpp"
#include "thermo/jet/columns.hpp"

namespace holdfast::thermo::tests {
namespace {

const std::array<const char*, kBases> kSymbols = {"T", "p", "v", "rho", "u", "h", "s", "a", "g"};

/// All (dX/dY)_Z with three different letters, as a user writes them.
std::vector<ColumnExpression> allPartials() {
  std::vector<ColumnExpression> out;
  for (const char* x : kSymbols)
    for (const char* y : kSymbols)
      for (const char* z : kSymbols) {
        if (x == y || y == z || x == z) continue;
        const std::string text = std::string("(d") + x + "/d" + y + ")_" + z;
        auto parsed = parseColumn(text);
        EXPECT_TRUE(std::holds_alternative<ColumnExpression>(parsed)) << text;
        if (auto* column = std::get_if<ColumnExpression>(&parsed)) out.push_back(*column);
      }
  return out;
}

/// Worst deviation of the states' partials, in units of the allowed 1e-10 of value or of the sum of the
/// absolute terms.
struct Worst {
  double deviation = 0;
  std::string where;
  int compared = 0;
};

void compare(const Subject& subject, const std::vector<StatePoint>& states, Worst& worst) {
  const auto columns = allPartials();
  const Columns algebra(columns, Basis::molar, subject.candidate->designations);
  Columns::Out out;
  for (std::size_t first = 0; first < states.size(); first += kTile) {
    const int count = static_cast<int>(std::min<std::size_t>(kTile, states.size() - first));
    Row T;
    Row rho;
    for (int k = 0; k < count; ++k) {
      T[k] = states[first + static_cast<std::size_t>(k)].T;
      rho[k] = states[first + static_cast<std::size_t>(k)].rho;
    }
    JetTile jet;
    subject.candidate->model->jets(Order::second, count, T, rho, subject.z, jet);
    GradientTile gradients;
    gradientsOf(jet, gradients);
    ColumnSource source;
    source.count = count;
    source.overall = &gradients;
    source.phase = Phase::liquid;
    source.z = subject.z.data();
    algebra.evaluate(source, out);
    for (int k = 0; k < count; ++k) {
      const auto bases = subject.truth.bases(oracle::Real(T[k]), oracle::Real(rho[k]));
      for (std::size_t c = 0; c < columns.size(); ++c) {
        const auto& partial = std::get<Partial>(columns[c].what);
        const bool dependent = (partial.by == Base::v && partial.held == Base::rho) ||
                               (partial.by == Base::rho && partial.held == Base::v);
        const Absence reason = out.reason[c][static_cast<std::size_t>(k)];
        ASSERT_EQ(reason == Absence::none, !dependent) << subject.label << " " << columns[c].written_as;
        if (dependent) continue;
        const auto truth = oracle::partial(bases, partial.of, partial.by, partial.held);
        const oracle::Real miss = abs(oracle::Real(out.value[c][k]) - truth.value);
        // Relative to the value, but near a zero crossing (terms cancel to a thousandth) to the sum of the
        // absolute terms.
        const oracle::Real size = abs(truth.value);
        const oracle::Real scale = size * 1000 >= truth.absolute ? size : truth.absolute;
        const double deviation =
            scale == 0 ? (miss == 0 ? 0 : 1e300) : static_cast<double>(miss / scale) / 1e-10;
        ++worst.compared;
        if (deviation > worst.deviation) {
          worst.deviation = deviation;
          worst.where = subject.label + " " + columns[c].written_as + " at T=" + std::to_string(T[k]) +
                        " rho=" + std::to_string(rho[k]);
        }
      }
    }
  }
}

TEST(FirstPartials, AgreeWithDifferentiationOfAAt50DigitsFromThinGasToCompressedLiquid) {
  for (const auto& subject : subjects()) {
    Worst worst;
    compare(subject, randomStates(subject, 64, 1e-5, 20260101), worst);
    EXPECT_LE(worst.deviation, 1) << worst.where;
    EXPECT_EQ(worst.compared, 64 * (504 - 14)) << subject.label;
  }
}

TEST(FirstPartials, KeepTheirDigitsInTriplePointVapour) {
  for (const auto& subject : subjects()) {
    if (!subject.candidate->model->isPure()) continue;
    const SaturationCurve& curve = subject.candidate->saturation[0];
    const double T = curve.lowestT();
    const double rho = curve.near(T).rho_vapour;
    Worst worst;
    compare(subject, {{T, rho}, {T, rho * 1e-3}, {T * 1.3, rho * 1e-2}}, worst);
    EXPECT_LE(worst.deviation, 1) << worst.where;
  }
}

}  // namespace
}  // namespace holdfast::thermo::tests
