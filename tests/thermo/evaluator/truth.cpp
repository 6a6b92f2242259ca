#include "tests/thermo/evaluator/truth.hpp"

#include <cmath>
#include <random>
#include <stdexcept>

namespace holdfast::thermo::tests {

const FluidLibrary& library() {
  static const FluidLibrary loaded = [] {
    auto result = FluidLibrary::load(HOLDFAST_SOURCE_DIR "/thermo/fluids/data");
    if (!result) throw std::runtime_error(result.error().message);
    return std::move(result).value();
  }();
  return loaded;
}

namespace {

oracle::Residual residualOf(const std::vector<const Fluid*>& fluids, const std::vector<double>& z,
                            EquationFamily family) {
  if (family == EquationFamily::reference)
    return oracle::referenceResidual(library().references()[fluids[0]->reference.value()].equation);
  std::vector<CubicComponent> components;
  std::vector<std::vector<double>> kij(fluids.size(), std::vector<double>(fluids.size(), 0.0));
  for (std::size_t i = 0; i < fluids.size(); ++i) {
    components.push_back({fluids[i]->T_critical, fluids[i]->p_critical, fluids[i]->acentric_factor.value_or(0)});
    for (std::size_t j = 0; j < fluids.size(); ++j)
      if (i != j && family == EquationFamily::peng_robinson)
        kij[i][j] = library().interaction(*fluids[i], *fluids[j]).kij;
  }
  const auto cubic = family == EquationFamily::soave ? CubicFamily::soave : CubicFamily::peng_robinson;
  return oracle::cubicResidual(cubic, components, kij, z);
}

}  // namespace

Subject subjectOf(const std::vector<std::string>& components, const std::vector<double>& z,
                  EquationFamily family) {
  CandidateSpec spec;
  spec.components = components;
  spec.equation = family;
  auto made = makeCandidate(library(), spec);
  if (!made) throw std::runtime_error(made.error().message);
  const auto& candidate = *made;

  Composition composition{};
  std::vector<const Fluid*> fluids;
  std::vector<oracle::IdealShare> ideal;
  double R = 0;
  for (std::size_t i = 0; i < z.size(); ++i) {
    composition[i] = z[i];
    fluids.push_back(library().find(components[i]).value());
    R += z[i] * candidate->model->equation().gasConstant(static_cast<int>(i));
  }
  for (std::size_t i = 0; i < z.size(); ++i)
    ideal.push_back({candidate->model->idealPart(static_cast<int>(i)).heatCapacity(),
                     z[i] * candidate->model->equation().gasConstant(static_cast<int>(i)) / R});

  std::string label(nameOf(family));
  for (const auto& component : components) label += " " + component;
  Subject subject{label, candidate, composition, oracle::Fluid(residualOf(fluids, z, family), ideal, R)};

  Row T;
  Row rho;
  T.lane.fill(300.0);
  rho.lane.fill(1.0);
  JetTile jet;
  candidate->model->jets(Order::first, 1, T, rho, composition, jet);
  subject.truth.calibrate(300.0, jet.ideal[i_f][0], jet.ideal[i_u][0]);
  return subject;
}

std::vector<Subject> subjects() {
  const auto reference = EquationFamily::reference;
  std::vector<Subject> out;
  for (const char* name : {"water", "propane", "carbon dioxide", "R-134a", "R-32", "R-1234yf", "ammonia",
                           "isobutane", "R-152a", "R-123", "methane", "R-23", "R-125"})
    out.push_back(subjectOf({name}, {1.0}, reference));
  out.push_back(subjectOf({"R-290"}, {1.0}, EquationFamily::soave));
  out.push_back(subjectOf({"R-32", "R-1234yf"}, {0.83, 0.17}, EquationFamily::peng_robinson));
  out.push_back(subjectOf({"R-290", "R-600a", "R-744"}, {0.25, 0.7, 0.05}, EquationFamily::peng_robinson));
  return out;
}

std::vector<StatePoint> randomStates(const Subject& subject, int count, double lowest, unsigned seed) {
  const Model& model = *subject.candidate->model;
  double T_from = 0;
  double T_up_to = 1e9;
  double T_critical = 0;
  double rho_critical = 0;
  for (int i = 0; i < model.components(); ++i) {
    const auto& component = model.component(i);
    T_from = std::max(T_from, std::max(component.validity.T_from, component.T_triple));
    T_up_to = std::min(T_up_to, component.validity.T_up_to);
    T_critical += subject.z[static_cast<std::size_t>(i)] * component.critical.T;
    rho_critical += subject.z[static_cast<std::size_t>(i)] * component.critical.rho;
  }
  T_up_to = std::min(T_up_to, 2.5 * T_critical);
  std::mt19937_64 random(seed);
  std::uniform_real_distribution<double> unit(0, 1);
  std::vector<StatePoint> out;
  while (static_cast<int>(out.size()) < count) {
    StatePoint state;
    state.T = T_from + (T_up_to - T_from) * unit(random);
    // Half of the states spread evenly in ln rho, half evenly in rho, so that gas and liquid are both met.
    state.rho = rho_critical *
                (unit(random) < 0.5 ? lowest * std::pow(2.8 / lowest, unit(random)) : 2.8 * unit(random));
    Row T;
    Row rho;
    T.lane.fill(state.T);
    rho.lane.fill(state.rho);
    ResidualTile r;
    model.residual(Order::second, 1, T, rho, subject.z, r);
    const double slope = 1 + r[r10][0] + r[r10][0] + (r[r20][0] - r[r10][0]);  // p_lnrho / (rho R T)
    if (slope > 1e-3) out.push_back(state);
  }
  return out;
}

}  // namespace holdfast::thermo::tests
