#include "coordinator/services/candidate_cache.hpp"

#include <array>
#include <cstring>
#include <utility>

namespace holdfast::coordinator {
namespace {

/// What makes two specifications the same, in bytes.
std::string keyOf(const thermo::CandidateSpec& spec) {
  std::string key(thermo::nameOf(spec.equation));
  const std::array<double, 3> reference{spec.reference_state.T, spec.reference_state.h,
                                        spec.reference_state.s};
  key.append(reinterpret_cast<const char*>(reference.data()), sizeof(reference));
  for (const std::string& component : spec.components)
    key.append(std::to_string(component.size())).append(":").append(component);
  return key;
}

}  // namespace

CandidateCache::CandidateCache(std::shared_ptr<const thermo::FluidLibrary> library, std::size_t most)
    : library_(std::move(library)), most_(most) {}

Result<std::shared_ptr<const thermo::Candidate>> CandidateCache::get(const thermo::CandidateSpec& spec) {
  const std::string key = keyOf(spec);
  {
    const std::lock_guard lock(mutex_);
    if (const auto found = by_key_.find(key); found != by_key_.end()) {
      entries_.splice(entries_.begin(), entries_, found->second);
      return found->second->candidate;
    }
  }
  // Built outside the lock: others need not wait for it. Two may build the same; the first one stays.
  auto made = thermo::makeCandidate(*library_, spec);
  if (!made.ok()) return made;
  const std::lock_guard lock(mutex_);
  if (by_key_.contains(key)) return made;
  entries_.push_front({key, *made});
  by_key_[key] = entries_.begin();
  if (entries_.size() > most_) {
    by_key_.erase(entries_.back().key);
    entries_.pop_back();
  }
  return made;
}

}  // namespace holdfast::coordinator
