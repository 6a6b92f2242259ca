#include "coordinator/study/candidates.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>
#include <map>
#include <numeric>
#include <utility>

#include "coordinator/study/wording.hpp"
#include "thermo/tile.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::array<std::string_view, 2> kFractionsBy = {"mass", "mole"};

/// A component as far as it is known.
struct Component {
  const thermo::Fluid* fluid = nullptr;
  Place place;
};

class CandidateReader {
 public:
  CandidateReader(const Section& section, const std::string& equation, const thermo::FluidLibrary& library,
                  Findings& findings)
      : section_(section), library_(library), findings_(findings), equation_{equation, section.place()} {}

  /// nullopt if anything was reported.
  std::optional<v1::PlannedCandidate> read() {
    const std::size_t before = findings_.count();
    equation_is_own_ = section_.has("equation");
    if (const auto own = section_.choice("equation", kEquations)) equation_ = *own;
    v1::PlannedCandidate candidate;
    if (section_.has("fluid"))
      readFluid(candidate);
    else if (section_.has("components"))
      readBlend(candidate);
    else
      findings_.report(section_.place(), "this candidate has neither \"fluid\" nor \"components\"");
    if (findings_.count() != before) return std::nullopt;
    candidate.set_equation(equation_.value);
    checkEquation();
    if (findings_.count() != before) return std::nullopt;
    for (const Component& component : components_) {
      candidate.add_components(component.fluid->label());
      candidate.add_molar_mass(component.fluid->M);
    }
    return candidate;
  }

 private:
  void readFluid(v1::PlannedCandidate& candidate) {
    for (const std::string_view key : {"components", "fractions", "fractions_by", "lattice"})
      if (section_.has(key))
        findings_.report(
            section_.placeOfValue(key),
            inQuotes(key) + " does not go with \"fluid\": a blend of your own has components = [...]");
    const auto name = section_.text("fluid");
    if (!name) return;
    if (const thermo::Blend* const blend = library_.findBlend(name->value)) {
      candidate.set_label(blend->designation);
      for (const std::string& component : blend->components) addComponent({component, name->place});
      if (components_.size() == blend->components.size())
        setFixed(candidate, blend->mass_fractions, /*by=*/"mass");
    } else {
      addComponent(*name);
      candidate.mutable_fixed()->add_mole_fraction(1);
    }
  }

  void readBlend(v1::PlannedCandidate& candidate) {
    const auto names = section_.texts("components");
    if (!names) return;
    const Place place = section_.placeOfValue("components");
    if (names->empty() || names->size() > thermo::kMostComponents) {
      findings_.report(place, "a candidate has 1 to " + std::to_string(thermo::kMostComponents) +
                                  " components, not " + std::to_string(names->size()));
      return;
    }
    for (const PlacedText& name : *names) addComponent(name);
    if (section_.has("fractions") && section_.has("lattice")) {
      findings_.report(section_.placeOfValue("lattice"), "\"lattice\" and \"fractions\" exclude each other");
    } else if (section_.has("lattice")) {
      readLattice(candidate, names->size());
    } else if (section_.has("fractions")) {
      readFractions(candidate, names->size());
    } else if (names->size() == 1) {
      candidate.mutable_fixed()->add_mole_fraction(1);
    } else {
      findings_.report(place, "a blend has \"fractions\" = [...] or a \"lattice\"");
    }
  }

  void readLattice(v1::PlannedCandidate& candidate, std::size_t components) {
    const auto steps = section_.integer("lattice", 1, kMostLatticeSteps);
    const auto by = section_.choice("fractions_by", kFractionsBy);
    if (components < 2)
      findings_.report(section_.placeOfValue("lattice"), "a lattice has two components or more");
    if (!steps) return;
    candidate.mutable_lattice()->set_steps(static_cast<std::uint32_t>(steps->value));
    candidate.mutable_lattice()->set_by_mass(by && by->value == "mass");
  }

  void readFractions(v1::PlannedCandidate& candidate, std::size_t components) {
    const auto fractions = section_.quantities("fractions", "1");
    const auto by = section_.choice("fractions_by", kFractionsBy);
    const Place place = section_.placeOfValue("fractions");
    if (!section_.has("fractions_by") && components > 1)
      findings_.report(place, "fractions by what? fractions_by = \"mass\" or \"mole\"");
    if (!fractions) return;
    if (fractions->size() != components)
      findings_.report(place, std::to_string(fractions->size()) + " fractions for " +
                                  std::to_string(components) + " components");
    double sum = 0;
    std::vector<double> values;
    for (const auto& fraction : *fractions) {
      if (fraction.value <= 0)
        findings_.report(fraction.place,
                         "a fraction must be above 0: leave out a component that is not there");
      sum += fraction.value;
      values.push_back(fraction.value);
    }
    if (std::abs(sum - 1) > kFractionSumTolerance) {
      std::array<char, 32> shown{};
      std::snprintf(shown.data(), shown.size(), "%.9g", sum);
      findings_.report(place, std::string("fractions sum to ") + shown.data() + ", not to 1 (within 1e-6)" +
                                  (std::abs(sum - 100) < 0.5 ? ": write parts of 1, not per cent" : ""));
      return;
    }
    if (components_.size() == values.size()) setFixed(candidate, values, by ? by->value : "mole");
  }

  /// Fractions of all components, scaled to sum 1 and turned into mole fractions.
  void setFixed(v1::PlannedCandidate& candidate, std::vector<double> fractions, std::string_view by) {
    if (by == "mass")
      for (std::size_t i = 0; i < fractions.size(); ++i) fractions[i] /= components_[i].fluid->M;
    const double sum = std::accumulate(fractions.begin(), fractions.end(), 0.0);
    for (const double fraction : fractions) candidate.mutable_fixed()->add_mole_fraction(fraction / sum);
  }

  void addComponent(const PlacedText& name) {
    if (library_.findBlend(name.value) != nullptr) {
      findings_.report(name.place, inQuotes(name.value) + " is a blend itself: list what it is made of");
      return;
    }
    const auto fluid = library_.find(name.value);
    if (!fluid) {
      findings_.report(name.place, fluid.error().message);
      return;
    }
    if (std::any_of(components_.begin(), components_.end(),
                    [&](const Component& other) { return other.fluid == *fluid; })) {
      findings_.report(name.place, inQuotes(name.value) + " is a component already");
      return;
    }
    components_.push_back({*fluid, name.place});
  }

  /// Every component must have what the equation needs. Never another equation in its place.
  void checkEquation() {
    if (equation_.value == "reference" && components_.size() > 1) {
      findings_.report(equation_is_own_ ? equation_.place : components_[0].place,
                       "blends have no reference equation yet: write equation = \"peng-robinson\"");
      return;
    }
    for (const Component& component : components_) {
      const thermo::Fluid& fluid = *component.fluid;
      if (equation_.value == "reference" && !fluid.reference)
        findings_.report(component.place, "no reference equation of " + inQuotes(fluid.label()) +
                                              " is known here: write equation = \"peng-robinson\"");
      else if (!fluid.ideal)
        findings_.report(component.place, "no ideal-gas heat capacity of " + inQuotes(fluid.label()) +
                                              " is known here: it cannot be computed");
    }
  }

  const Section& section_;
  const thermo::FluidLibrary& library_;
  Findings& findings_;
  PlacedText equation_;
  bool equation_is_own_ = false;
  std::vector<Component> components_;
};

/// What makes two candidates the same: equation, lattice, and parts in whatever order.
std::string sameness(const v1::PlannedCandidate& candidate) {
  std::vector<std::pair<std::string, double>> parts;
  parts.reserve(static_cast<std::size_t>(candidate.components_size()));
  for (int i = 0; i < candidate.components_size(); ++i)
    parts.emplace_back(candidate.components(i),
                       candidate.has_fixed() ? candidate.fixed().mole_fraction(i) : 0);
  std::sort(parts.begin(), parts.end());
  std::string text = candidate.equation() + candidate.lattice().ShortDebugString();
  for (const auto& [component, fraction] : parts) text += '\n' + component + ' ' + std::to_string(fraction);
  return text;
}

}  // namespace

Candidates readCandidates(const std::vector<Section>& sections, const std::string& equation,
                          const thermo::FluidLibrary& library, Findings& findings) {
  Candidates candidates;
  std::map<std::string, int> line_of;
  for (const Section& section : sections) {
    auto candidate = CandidateReader(section, equation, library, findings).read();
    if (!candidate) continue;
    const Place place = section.placeOfValue(section.has("fluid") ? "fluid" : "components");
    const auto [first, is_new] = line_of.emplace(sameness(*candidate), place.line);
    if (!is_new) findings.report(place, "the same candidate stands in line " + std::to_string(first->second));
    candidates.planned.push_back(std::move(*candidate));
    candidates.places.push_back(place);
  }
  giveLabels(candidates.planned);
  return candidates;
}

}  // namespace holdfast::coordinator
