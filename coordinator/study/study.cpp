#include "coordinator/study/study.hpp"

#include <algorithm>
#include <array>
#include <map>
#include <utility>

#include "coordinator/study/axes.hpp"
#include "coordinator/study/candidates.hpp"
#include "coordinator/study/collect.hpp"
#include "coordinator/study/job_size.hpp"
#include "coordinator/study/section.hpp"
#include "coordinator/study/wording.hpp"
#include "proto/points.hpp"
#include "thermo/equilibrium/candidate.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::array<std::string_view, 8> kStudyKeys = {
    "title", "equation", "basis", "beyond_validity", "candidate", "axis", "collect", "reference_state"};
constexpr std::array<std::string_view, 4> kReferenceStateKeys = {"state", "T", "h", "s"};
constexpr std::array<std::string_view, 2> kBases = {"mass", "molar"};
constexpr std::array<std::string_view, 2> kBeyondValidity = {"compute", "refuse"};
constexpr std::array<std::string_view, 1> kReferenceStates = {"saturated liquid"};

constexpr std::size_t kMostBytes = std::size_t{1024} * 1024;
constexpr std::size_t kLongestName = 64;

/// A study's name becomes the name of a view in the store, and of a table with "points_" before it.
void checkName(std::string_view name, Findings& findings) {
  constexpr std::array<std::string_view, 12> kTables = {
      "store",     "study",          "quantity",    "fluid",
      "candidate", "reference_used", "composition", "composition_part",
      "job",       "phase",          "outcome",     "absence"};
  if (name.empty() || name.size() > kLongestName ||
      name.find_first_not_of("abcdefghijklmnopqrstuvwxyz0123456789_") != std::string_view::npos)
    findings.report(
        {}, "a study is named by its file, in 1 to 64 of the signs a-z, 0-9 and _, not " + inQuotes(name));
  else if (std::find(kTables.begin(), kTables.end(), name) != kTables.end() || name.starts_with("points_") ||
           name.starts_with("sqlite_"))
    findings.report({}, "the store needs the name " + inQuotes(name) + " itself: give the file another");
}

v1::ReferenceState readReferenceState(const Section& study) {
  const thermo::ReferenceState usual;
  v1::ReferenceState state;
  state.set_t(usual.T);
  state.set_h(usual.h);
  state.set_s(usual.s);
  const auto section = study.section("reference_state", "[reference_state]", kReferenceStateKeys);
  if (!section) return state;
  section->choice("state", kReferenceStates);
  if (const auto T = section->quantity("T", "K")) {
    state.set_t(T->value);
    if (T->value <= 0) section->report(T->place, "T must be above 0 K");
  }
  if (const auto h = section->quantity("h", "J/kg")) state.set_h(h->value);
  if (const auto s = section->quantity("s", "J/(kg K)")) state.set_s(s->value);
  return state;
}

/// Builds every candidate once, so that what cannot be computed shows before any work starts.
void checkCandidates(const Candidates& candidates, const Axes& axes,
                     const v1::ReferenceState& reference_state, const thermo::FluidLibrary& library,
                     Findings& findings) {
  std::map<std::pair<std::string, std::vector<std::string>>, std::string> message_of;
  for (std::size_t i = 0; i < candidates.planned.size(); ++i) {
    const v1::PlannedCandidate& planned = candidates.planned[i];
    if (planned.components_size() > 1 && axes.sweeps("beta")) {
      findings.report(
          candidates.places[i],
          planned.label() +
              " is a blend: axes with beta are for pure fluids, two-phase blends are not computed yet");
      continue;
    }
    thermo::CandidateSpec spec;
    spec.components.assign(planned.components().begin(), planned.components().end());
    spec.equation = thermo::equationFamilyOf(planned.equation()).value();
    spec.reference_state = {.T = reference_state.t(), .h = reference_state.h(), .s = reference_state.s()};
    const auto [message, is_new] = message_of.try_emplace({planned.equation(), spec.components});
    if (is_new)
      if (const auto built = thermo::makeCandidate(library, spec); !built)
        message->second = built.error().message;
    if (!message->second.empty()) findings.report(candidates.places[i], message->second);
  }
}

v1::Plan readPlan(const Section& study, const thermo::FluidLibrary& library, const StudyLimits& limits,
                  Findings& findings) {
  v1::Plan plan;
  if (const auto title = study.text("title")) plan.set_title(title->value);
  const auto basis = study.choice("basis", kBases);
  plan.set_basis(basis && basis->value == "molar" ? v1::BASIS_MOLAR : v1::BASIS_MASS);
  const auto beyond = study.choice("beyond_validity", kBeyondValidity);
  plan.set_refuse_beyond_validity(beyond && beyond->value == "refuse");
  const auto equation = study.choice("equation", kEquations);
  *plan.mutable_reference_state() = readReferenceState(study);

  if (!study.has("candidate")) findings.report({}, "a study has at least one [[candidate]]");
  if (!study.has("axis")) findings.report({}, "a study has two axes, each an [[axis]]");
  const Candidates candidates = readCandidates(study.sections("candidate", kCandidateKeys),
                                               equation ? equation->value : "reference", library, findings);
  const Axes axes = readAxes(study.sections("axis", kAxisKeys), plan.basis(), findings);
  checkCandidates(candidates, axes, plan.reference_state(), library, findings);
  plan.mutable_candidates()->Add(candidates.planned.begin(), candidates.planned.end());
  plan.mutable_axes()->Add(axes.planned.begin(), axes.planned.end());

  std::vector<std::string> components;
  for (const auto& candidate : candidates.planned)
    components.insert(components.end(), candidate.components().begin(), candidate.components().end());
  if (const auto collect = study.section("collect", "[collect]", kCollectKeys)) {
    const auto columns = readColumns(*collect, axes, components, library, findings);
    plan.mutable_columns()->Add(columns.begin(), columns.end());
  } else if (!study.has("collect")) {
    findings.report({}, "a study says what to collect: [collect] with quantities and partials");
  }

  plan.set_points(plan::Points(plan).count());
  plan.set_points_per_job(pointsPerJob(plan.points(), static_cast<std::uint64_t>(plan.columns_size())));
  if (plan.points() > limits.points && !axes.places.empty())
    findings.report(axes.places.back(), "the study has " + grouped(plan.points()) + " points; the limit is " +
                                            grouped(limits.points) +
                                            ": fewer axis values, compositions or candidates");
  return plan;
}

}  // namespace

std::string render(std::string_view file, const std::vector<Diagnostic>& diagnostics) {
  std::string text;
  for (const Diagnostic& diagnostic : diagnostics) {
    text += file;
    if (diagnostic.line > 0)
      text += ':' + std::to_string(diagnostic.line) + ':' + std::to_string(diagnostic.column);
    text += ": error: " + diagnostic.message + '\n';
  }
  return text;
}

StudyReading readStudy(std::string_view name, std::string_view text, const thermo::FluidLibrary& library,
                       const StudyLimits& limits) {
  Findings findings(text);
  checkName(name, findings);
  StudyReading reading;
  if (text.size() > kMostBytes) {
    findings.report({}, "a study has at most 1 MiB of text, not " + grouped(text.size()) + " bytes");
  } else {
    try {
      const toml::table table = toml::parse(text);
      const Section study(table, "a study", kStudyKeys, Place{}, findings);
      reading.plan = readPlan(study, library, limits, findings);
      reading.plan->set_name(std::string(name));
    } catch (const toml::parse_error& error) {
      findings.report(placeOf(error.source()), std::string(error.description()));
    }
  }
  if (findings.count() > 0) reading.plan.reset();
  reading.diagnostics = std::move(findings).inFileOrder();
  return reading;
}

}  // namespace holdfast::coordinator
