// How candidates are called in the store.
#include <algorithm>
#include <array>
#include <cstdio>
#include <map>

#include "coordinator/study/candidates.hpp"

namespace holdfast::coordinator {
namespace {

enum class Detail { usual, full };

std::string perCent(double fraction, Detail detail) {
  std::array<char, 32> text{};
  std::snprintf(text.data(), text.size(), detail == Detail::full ? "%.7g" : "%.1f", 100 * fraction);
  std::string shown = text.data();
  if (shown.ends_with(".0")) shown.resize(shown.size() - 2);
  return shown;
}

/// What a candidate is made of: "R-32/R-1234yf (68.9/31.1)", the form of ISO 817, by mass.
std::string describe(const v1::PlannedCandidate& candidate, Detail detail) {
  std::string components, per_cent;
  double mass = 0;
  for (int i = 0; i < candidate.fixed().mole_fraction_size(); ++i)
    mass += candidate.fixed().mole_fraction(i) * candidate.molar_mass(i);
  for (int i = 0; i < candidate.components_size(); ++i) {
    if (i > 0) components += '/';
    components += candidate.components(i);
    if (!candidate.has_fixed()) continue;
    if (i > 0) per_cent += '/';
    per_cent += perCent(candidate.fixed().mole_fraction(i) * candidate.molar_mass(i) / mass, detail);
  }
  if (candidate.components_size() == 1) return components;
  if (candidate.has_fixed()) return components + " (" + per_cent + ")";
  if (detail == Detail::usual) return components;
  return components + " in steps of 1/" + std::to_string(candidate.lattice().steps()) +
         (candidate.lattice().by_mass() ? " by mass" : "");
}

/// Calls `rename` for every candidate whose label another one has too.
template <class Rename>
void forRepeated(std::vector<v1::PlannedCandidate>& candidates, Rename rename) {
  std::map<std::string, std::vector<v1::PlannedCandidate*>> of_label;
  for (auto& candidate : candidates) of_label[candidate.label()].push_back(&candidate);
  for (auto& [label, alike] : of_label)
    if (alike.size() > 1) rename(alike);
}

bool equationsDiffer(const std::vector<v1::PlannedCandidate*>& alike) {
  return std::any_of(alike.begin(), alike.end(),
                     [&](const auto* candidate) { return candidate->equation() != alike[0]->equation(); });
}

}  // namespace

void giveLabels(std::vector<v1::PlannedCandidate>& candidates) {
  for (auto& candidate : candidates)
    if (candidate.label().empty()) candidate.set_label(describe(candidate, Detail::usual));
  forRepeated(candidates, [](auto& alike) {
    if (!equationsDiffer(alike)) return;
    for (auto* const candidate : alike)
      candidate->set_label(candidate->label() + ", " + candidate->equation());
  });
  forRepeated(candidates, [](auto& alike) {
    for (auto* const candidate : alike)
      candidate->set_label(describe(*candidate, Detail::full) + ", " + candidate->equation());
  });
  forRepeated(candidates, [](auto& alike) {
    int number = 0;
    for (auto* const candidate : alike)
      candidate->set_label(candidate->label() + ", no. " + std::to_string(++number));
  });
}

}  // namespace holdfast::coordinator
