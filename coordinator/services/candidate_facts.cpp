#include "coordinator/services/candidate_facts.hpp"

#include <tbb/parallel_for.h>

#include <cassert>
#include <optional>
#include <string>

#include "thermo/equilibrium/candidate.hpp"

namespace holdfast::coordinator {

Result<std::vector<CandidateFacts>> candidateFacts(const v1::Plan& plan,
                                                   const thermo::FluidLibrary& library) {
  const auto count = static_cast<std::size_t>(plan.candidates_size());
  std::vector<CandidateFacts> facts(count);
  std::vector<std::string> wrong(count);
  tbb::parallel_for(std::size_t{0}, count, [&](std::size_t i) {
    const v1::PlannedCandidate& planned = plan.candidates(static_cast<int>(i));
    thermo::CandidateSpec spec;
    spec.components.assign(planned.components().begin(), planned.components().end());
    const auto family = thermo::equationFamilyOf(planned.equation());
    assert(family);  // the reader lets no other name through
    spec.equation = *family;
    spec.reference_state = {plan.reference_state().t(), plan.reference_state().h(),
                            plan.reference_state().s()};
    const auto made = thermo::makeCandidate(library, spec);
    if (made.ok())
      facts[i] = {(*made)->data_kind, (*made)->reference_used};
    else
      wrong[i] = planned.label() + ": " + made.error().message;
  });
  for (const std::string& one : wrong)
    if (!one.empty()) return Error{one};
  return facts;
}

}  // namespace holdfast::coordinator
