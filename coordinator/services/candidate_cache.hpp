// Candidates made once and kept: building one solves for its saturation line.
#pragma once

#include <cstddef>
#include <list>
#include <memory>
#include <mutex>
#include <string>
#include <unordered_map>

#include "thermo/equilibrium/candidate.hpp"
#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// The candidates asked for last, at most `most` of them. Safe from many threads.
class CandidateCache {
 public:
  CandidateCache(std::shared_ptr<const thermo::FluidLibrary> library, std::size_t most);

  const thermo::FluidLibrary& library() const { return *library_; }

  /// From the cache or built anew; errors as makeCandidate gives them, and not kept.
  Result<std::shared_ptr<const thermo::Candidate>> get(const thermo::CandidateSpec& spec);

 private:
  struct Entry {
    std::string key;
    std::shared_ptr<const thermo::Candidate> candidate;
  };

  std::shared_ptr<const thermo::FluidLibrary> library_;
  std::size_t most_;
  std::mutex mutex_;
  std::list<Entry> entries_;  ///< the last used first
  std::unordered_map<std::string, std::list<Entry>::iterator> by_key_;
};

}  // namespace holdfast::coordinator
