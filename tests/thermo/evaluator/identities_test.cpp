// The identities of thermodynamics on 10,000 random states over sixteen candidates of both equation families.
// One side of each comes from the algebra, the other from 50-digit differentiation of s, p and v along the
// path, so that a wrong sign or factor cannot cancel. The relations are those of any textbook of
// thermodynamics: Maxwell (1871); Mayer's relation; common practice for the others.
#include <gtest/gtest.h>

#include "tests/thermo/evaluator/truth.hpp"
#include "thermo/jet/columns.hpp"

namespace holdfast::thermo::tests {
namespace {

using oracle::Derivative;
using oracle::Real;

ColumnExpression column(const std::string& text) {
  auto parsed = parseColumn(text);
  if (!std::holds_alternative<ColumnExpression>(parsed)) throw std::runtime_error(text);
  return std::get<ColumnExpression>(parsed);
}

/// A statement: the column on the left equals what `truth` makes of the state.
struct Statement {
  std::string left;
  std::function<Derivative(const oracle::Fluid::Bases&, const Real& M)> right;
};

Derivative negative(Derivative d) {
  return {Real(-d.value), d.absolute};
}

std::vector<Statement> statements() {
  const auto d = [](Base of, Base by, Base held) {
    return [=](const oracle::Fluid::Bases& b, const Real&) { return oracle::partial(b, of, by, held); };
  };
  const auto minus = [](Base of, Base by, Base held) {
    return [=](const oracle::Fluid::Bases& b, const Real&) {
      return negative(oracle::partial(b, of, by, held));
    };
  };
  using enum Base;
  return {
      {"(dT/dv)_s", minus(p, s, v)},  // Maxwell, from u
      {"(dT/dp)_s", d(v, s, p)},      // from h
      {"(ds/dv)_T", d(p, T, v)},      // from a
      {"(ds/dp)_T", minus(v, T, p)},  // from g
      {"(du/ds)_v",
       [](const auto& b, const Real&) {
         return Derivative{b[T].value(), b[T].value()};
       }},
      {"(dh/dp)_s",
       [](const auto& b, const Real&) {
         return Derivative{b[v].value(), b[v].value()};
       }},
      {"cp",  // cv + T v alpha_v^2 / kappa_T
       [](const auto& b, const Real&) {
         const auto cv = oracle::partial(b, u, T, Base::v);
         const auto dvdT = oracle::partial(b, Base::v, T, p);
         const auto dvdp = oracle::partial(b, Base::v, p, T);
         const Real term = -b[T].value() * dvdT.value * dvdT.value / dvdp.value;
         return Derivative{Real(cv.value + term), Real(abs(cv.value) + abs(term))};
       }},
      {"cv",  // T (ds/dT)_v
       [](const auto& b, const Real&) {
         const auto ds = oracle::partial(b, s, T, Base::v);
         return Derivative{Real(b[T].value() * ds.value), Real(b[T].value() * ds.absolute)};
       }},
      {"w",  // first route: -v^2 (dp/dv)_s / M
       [](const auto& b, const Real& M) {
         const auto slope = oracle::partial(b, p, Base::v, s);
         const Real w = sqrt(Real(-b[Base::v].value() * b[Base::v].value() * slope.value / M));
         return Derivative{w, Real(w * slope.absolute / abs(slope.value))};
       }},
      {"w",  // second route: (cp/cv) (dp/drho)_T / M
       [](const auto& b, const Real& M) {
         const auto cp = oracle::partial(b, h, T, p);
         const auto cv = oracle::partial(b, u, T, Base::v);
         const auto slope = oracle::partial(b, p, rho, T);
         const Real w = sqrt(Real(cp.value / cv.value * slope.value / M));
         return Derivative{w, Real(w * cp.absolute / abs(cp.value))};
       }},
      {"(dp/dv)_T",  // cyclic rule
       [](const auto& b, const Real&) {
         const Real other =
             -1 / (oracle::partial(b, Base::v, T, p).value * oracle::partial(b, T, p, Base::v).value);
         return Derivative{other, Real(abs(other))};
       }},
      {"mu_JT", d(T, p, h)},
  };
}

TEST(Identities, HoldOnTenThousandRandomStates) {
  const auto all = statements();
  std::vector<ColumnExpression> columns;
  for (const auto& statement : all) columns.push_back(column(statement.left));
  int states_seen = 0;
  for (const auto& subject : subjects()) {
    const Columns algebra(columns, Basis::molar, subject.candidate->designations);
    const auto states = randomStates(subject, 640, 1e-5, 77);
    const Real M(subject.candidate->model->molarMass(subject.z));
    std::vector<double> worst(all.size(), 0.0);
    Columns::Out out;
    for (std::size_t first = 0; first < states.size(); first += kTile) {
      Row T;
      Row rho;
      for (int k = 0; k < kTile; ++k) {
        T[k] = states[first + static_cast<std::size_t>(k)].T;
        rho[k] = states[first + static_cast<std::size_t>(k)].rho;
      }
      JetTile jet;
      subject.candidate->model->jets(Order::second, kTile, T, rho, subject.z, jet);
      GradientTile gradients;
      gradientsOf(jet, gradients);
      ColumnSource source;
      source.count = kTile;
      source.overall = &gradients;
      source.phase = Phase::liquid;
      source.z = subject.z.data();
      algebra.evaluate(source, out);
      for (int k = 0; k < kTile; ++k) {
        const auto bases = subject.truth.bases(Real(T[k]), Real(rho[k]));
        for (std::size_t c = 0; c < all.size(); ++c) {
          if (out.reason[c][static_cast<std::size_t>(k)] == Absence::singular) {
            // Only the speed of sound may be missing, and only where the state is unstable to sound.
            EXPECT_EQ(all[c].left, "w");
            EXPECT_GE(oracle::partial(bases, Base::p, Base::v, Base::s).value, 0);
            continue;
          }
          const Derivative right = all[c].right(bases, M);
          worst[c] = std::max(worst[c],
                              static_cast<double>(abs(Real(out.value[c][k]) - right.value) / right.absolute));
        }
        ++states_seen;
      }
    }
    for (std::size_t c = 0; c < all.size(); ++c)
      EXPECT_LE(worst[c], 1e-10) << subject.label << " " << all[c].left;
  }
  EXPECT_GE(states_seen, 10000);
}

// Clapeyron's equation: the algebra's (s'' - s')/(v'' - v') against the slope of p_sat(T), which is solved
// anew at 50 digits on both sides of T. At a step of 1e-15 T the truncation is some 1e-30: this difference is
// the independent truth, not the product's way.
TEST(Identities, ClapeyronHoldsAlongTheSaturationLine) {
  const std::vector<ColumnExpression> columns = {column("(dp/dT)_sat"),   column("(dv'/dT)_sat"),
                                                 column("(dv''/dT)_sat"), column("(dh'/dT)_sat"),
                                                 column("(ds''/dT)_sat"), column("(dh''/dp)_sat")};
  for (const auto& subject : subjects()) {
    if (!subject.candidate->model->isPure()) continue;
    const SaturationCurve& curve = subject.candidate->saturation[0];
    const int count = 8;
    Row T;
    for (int k = 0; k < count; ++k)
      T[k] = curve.lowestT() +
             (0.999 * subject.candidate->model->component(0).critical.T - curve.lowestT()) * k / (count - 1);
    SaturationTile saturated;
    curve.atT(count, T, saturated);
    std::array<JetTile, 2> jet;
    std::array<GradientTile, 2> side;
    subject.candidate->model->jets(Order::second, count, T, saturated.rho_liquid, subject.z, jet[0]);
    subject.candidate->model->jets(Order::second, count, T, saturated.rho_vapour, subject.z, jet[1]);
    gradientsOf(jet[0], side[0]);
    gradientsOf(jet[1], side[1]);
    ColumnSource source;
    source.count = count;
    source.overall = side.data();
    source.liquid = side.data();
    source.vapour = &side[1];
    Row beta;
    beta.lane.fill(0.0);
    source.beta = &beta;
    source.phase = Phase::liquid;
    source.z = subject.z.data();
    const Columns algebra(columns, Basis::molar, subject.candidate->designations);
    Columns::Out out;
    algebra.evaluate(source, out);
    for (int k = 0; k < count; ++k) {
      ASSERT_TRUE(saturated.converged[static_cast<std::size_t>(k)]) << subject.label << " T=" << T[k];
      const Real t(T[k]);
      const Real step = t * Real("1e-15");
      const auto at = [&](const Real& where) {
        const auto solved = oracle::saturation(subject.truth, where, Real(saturated.rho_liquid[k]),
                                               Real(saturated.rho_vapour[k]));
        const auto l = subject.truth.bases(where, solved.rho_liquid);
        const auto v = subject.truth.bases(where, solved.rho_vapour);
        return std::array<Real, 6>{v[Base::p].value(), l[Base::v].value(), v[Base::v].value(),
                                   l[Base::h].value(), v[Base::s].value(), v[Base::h].value()};
      };
      const auto after = at(t + step);
      const auto before = at(t - step);
      for (std::size_t c = 0; c < columns.size(); ++c) {
        const Real slope = c == 5 ? Real((after[5] - before[5]) / (after[0] - before[0]))
                                  : Real((after[c] - before[c]) / (2 * step));
        // The derivative along the line inherits the error of the solved densities, some 1e-14 over
        // (dp/drho)/(p/rho): 1e-10 is met up to 0.99 T_c, and 1e-7 above it, where dv/dT itself grows without
        // bound.
        const bool close = T[k] > 0.99 * subject.candidate->model->component(0).critical.T;
        EXPECT_LE(abs(Real(out.value[c][k]) - slope), (close ? 1e-7 : 1e-10) * abs(slope))
            << subject.label << " " << columns[c].written_as << " at " << T[k];
      }
    }
  }
}

}  // namespace
}  // namespace holdfast::thermo::tests
