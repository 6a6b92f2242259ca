#include "coordinator/study/axes.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>
#include <utility>

#include "coordinator/study/wording.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::array<std::string_view, 2> kSpacings = {"linear", "log"};
constexpr std::array<std::string_view, 4> kSweepable = {"T", "p", "rho", "beta"};

std::string_view unitOf(std::string_view quantity, v1::Basis basis) {
  if (quantity == "T") return "K";
  if (quantity == "p") return "Pa";
  if (quantity == "rho") return basis == v1::BASIS_MOLAR ? "mol/m3" : "kg/m3";
  return "1";
}

std::string shortest(double value) {
  std::array<char, 32> text{};
  std::snprintf(text.data(), text.size(), "%.9g", value);
  return text.data();
}

/// False, and reported, where no state can have this value.
bool isPossible(std::string_view quantity, std::string_view unit, const Placed<double>& value,
                Findings& findings) {
  if (quantity == "beta") {
    if (value.value >= 0 && value.value <= 1) return true;
    findings.report(value.place,
                    "beta (molar vapour fraction) lies between 0 and 1, not at " + shortest(value.value));
    return false;
  }
  if (value.value > 0) return true;
  findings.report(value.place, std::string(quantity) + " must be above 0 " + std::string(unit) + ", not " +
                                   shortest(value.value) + " " + std::string(unit));
  return false;
}

/// Values from one end to the other, both ends exact. Logarithms in long double: the x87 unit gives the same
/// bits on every x86-64 processor, where the double functions of glibc depend on its kind.
std::vector<double> spread(double from, double to, std::int64_t count, bool logarithmic) {
  std::vector<double> values(static_cast<std::size_t>(count), from);
  const long double start = logarithmic ? std::log(static_cast<long double>(from)) : from;
  const long double end = logarithmic ? std::log(static_cast<long double>(to)) : to;
  for (std::int64_t i = 1; i + 1 < count; ++i) {
    const long double here = start + (end - start) * i / (count - 1);
    values[static_cast<std::size_t>(i)] = static_cast<double>(logarithmic ? std::exp(here) : here);
  }
  if (count > 1) values.back() = to;
  return values;
}

std::optional<std::vector<double>> readList(const Section& axis, std::string_view quantity,
                                            std::string_view unit, Findings& findings) {
  for (const std::string_view key : {"from", "to", "count", "spacing"})
    if (axis.has(key)) {
      findings.report(axis.placeOfValue(key), inQuotes(key) + " and \"values\" exclude each other");
      break;
    }
  const auto found = axis.quantities("values", unit);
  if (!found) return std::nullopt;
  const Place place = axis.placeOfValue("values");
  if (found->empty() || static_cast<std::int64_t>(found->size()) > kMostAxisValues) {
    findings.report(
        place, "an axis has 1 to " + grouped(kMostAxisValues) + " values, not " + grouped(found->size()));
    return std::nullopt;
  }
  bool good = true;
  std::vector<std::pair<double, Place>> sorted;
  std::vector<double> values;
  for (const auto& value : *found) {
    good = isPossible(quantity, unit, value, findings) && good;
    sorted.emplace_back(value.value, value.place);
    values.push_back(value.value);
  }
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const auto& a, const auto& b) { return a.first < b.first; });
  for (std::size_t i = 1; i < sorted.size(); ++i)
    if (sorted[i].first == sorted[i - 1].first) {
      findings.report(sorted[i].second, "the axis has this value already");
      good = false;
    }
  if (!good) return std::nullopt;
  return values;
}

std::optional<std::vector<double>> readRange(const Section& axis, std::string_view quantity,
                                             std::string_view unit, Findings& findings) {
  const auto count = axis.integer("count", 1, kMostAxisValues);
  const auto spacing = axis.choice("spacing", kSpacings);
  auto from = axis.quantity("from", unit);
  auto to = axis.quantity("to", unit);
  for (const std::string_view key : {"from", "to", "count"})
    if (!axis.has(key))
      findings.report(axis.place(), "this axis has no " + inQuotes(key) +
                                        ": it takes from, to and count, or values = [...]");
  const bool logarithmic = spacing && spacing->value == "log";
  if (from && !isPossible(quantity, unit, *from, findings)) from.reset();
  if (to && !isPossible(quantity, unit, *to, findings)) to.reset();
  if (logarithmic) {
    for (auto* const end : {&from, &to})
      if (*end && (*end)->value <= 0) {  // beta = 0
        findings.report((*end)->place, "an axis with spacing \"log\" begins and ends above 0");
        end->reset();
      }
  }
  if (!count || !from || !to || (axis.has("spacing") && !spacing)) return std::nullopt;
  if (count->value == 1 && from->value != to->value) {
    findings.report(count->place, "one value cannot be both \"from\" and \"to\": write values = [...]");
    return std::nullopt;
  }
  if (count->value > 1 && from->value == to->value) {
    findings.report(to->place, "\"from\" and \"to\" are the same value");
    return std::nullopt;
  }
  return spread(from->value, to->value, count->value, logarithmic);
}

std::optional<v1::PlannedAxis> readAxis(const Section& axis, v1::Basis basis, Findings& findings) {
  if (!axis.has("quantity")) findings.report(axis.place(), "this axis does not say its \"quantity\"");
  const auto quantity = axis.choice("quantity", kSweepable);
  if (!quantity) return std::nullopt;
  const std::string_view unit = unitOf(quantity->value, basis);
  const auto values = axis.has("values") ? readList(axis, quantity->value, unit, findings)
                                         : readRange(axis, quantity->value, unit, findings);
  v1::PlannedAxis planned;
  planned.set_quantity(quantity->value);
  if (values) planned.mutable_values()->Add(values->begin(), values->end());
  return planned;
}

bool isPair(std::string_view first, std::string_view second) {
  constexpr std::array<std::pair<std::string_view, std::string_view>, 4> kPairs = {
      {{"T", "p"}, {"T", "rho"}, {"T", "beta"}, {"p", "beta"}}};
  return std::any_of(kPairs.begin(), kPairs.end(), [&](const auto& pair) {
    return pair == std::pair(first, second) || pair == std::pair(second, first);
  });
}

}  // namespace

bool Axes::sweeps(std::string_view quantity) const {
  return std::any_of(planned.begin(), planned.end(),
                     [&](const auto& axis) { return axis.quantity() == quantity; });
}

Axes readAxes(const std::vector<Section>& sections, v1::Basis basis, Findings& findings) {
  constexpr std::string_view kPairs = "a state is given by two axes: T,p | T,rho | T,beta | p,beta";
  Axes axes;
  for (std::size_t i = 0; i < std::min(sections.size(), kSweepable.size());
       ++i) {  // more are a mistake anyway
    const Section& section = sections[i];
    if (auto axis = readAxis(section, basis, findings)) {
      const Place place = section.placeOfValue("quantity");
      if (axes.sweeps(axis->quantity())) {
        findings.report(place, "there is an axis of " + axis->quantity() + " already");
        continue;
      }
      axes.planned.push_back(std::move(*axis));
      axes.places.push_back(place);
    }
  }
  if (sections.size() != 2 && !sections.empty())
    findings.report(sections[sections.size() > 2 ? 2 : 0].place(),
                    std::string(kPairs) + "; this study has " + std::to_string(sections.size()));
  else if (axes.planned.size() == 2 && !isPair(axes.planned[0].quantity(), axes.planned[1].quantity()))
    findings.report(axes.places[1], std::string(kPairs) + "; not " + axes.planned[0].quantity() + "," +
                                        axes.planned[1].quantity());
  return axes;
}

}  // namespace holdfast::coordinator
