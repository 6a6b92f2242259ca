#include "coordinator/queue/queue.hpp"

#include <algorithm>
#include <cassert>

namespace holdfast::coordinator {
namespace {

constexpr std::uint32_t kTilePoints = 64;

/// Points of the first of two halves: whole tiles as long as there is more than one.
std::uint32_t firstHalf(std::uint32_t points) {
  if (points <= kTilePoints) return points / 2;
  const std::uint32_t tiles = (points + kTilePoints - 1) / kTilePoints;
  return tiles / 2 * kTilePoints;
}

}  // namespace

std::size_t leaseSize(std::uint64_t waiting, std::size_t workers, unsigned threads, std::size_t held) {
  constexpr std::size_t kMostJobsOfLease = 64;
  const std::size_t wanted = std::clamp<std::size_t>(threads, 4, kMostJobsOfLease);
  if (held > wanted / 2) return 0;
  const std::uint64_t share = waiting / (2 * std::max<std::size_t>(workers, 1));
  return static_cast<std::size_t>(std::clamp<std::uint64_t>(share, 1, wanted - held));
}

Queue::Queue(QueuePolicy policy, LeaseId first_lease) : policy_(policy), next_lease_(first_lease) {}

void Queue::addStudy(StudyId study, std::span<const QueuedJob> open, std::uint64_t next_job) {
  assert(!studies_.contains(study));
  Study& added = studies_[study];
  added.records.reserve(open.size());
  for (const QueuedJob& job : open) {
    assert(job.id < next_job && (added.records.empty() || added.records.back().id < job.id));
    Record record;
    record.id = job.id;
    record.first_point = job.first_point;
    record.points = job.points;
    record.attempts = static_cast<std::uint16_t>(job.attempts);
    added.records.push_back(record);
  }
  added.next_job = next_job;
  added.counts.waiting = open.size();
}

std::vector<LeaseOfWorker> Queue::removeStudy(StudyId study) {
  std::vector<LeaseOfWorker> ended;
  for (auto lease = leases_.begin(); lease != leases_.end();) {
    if (lease->second.study != study) {
      ++lease;
      continue;
    }
    ended.push_back({lease->second.worker, lease->first});
    std::erase(workers_[lease->second.worker], lease->first);
    lease = leases_.erase(lease);
  }
  studies_.erase(study);
  return ended;
}

std::optional<GrantedLease> Queue::grant(WorkerId worker, std::size_t most, Instant now) {
  const std::vector<LeaseId>& own = workers_[worker];
  for (const LeaseId lease : own)
    if (leases_.at(lease).alone) return std::nullopt;
  for (auto& [id, study] : studies_) {
    if (study.suspects.empty()) continue;
    if (!own.empty()) return std::nullopt;
    return lend(id, study, worker, 1, now);
  }
  if (most == 0) return std::nullopt;
  // Studies take turns: from the one after the last served, once around.
  auto turn = studies_.upper_bound(last_served_);
  for (std::size_t tried = 0; tried < studies_.size(); ++tried, ++turn) {
    if (turn == studies_.end()) turn = studies_.begin();
    if (turn->second.counts.waiting == 0) continue;
    last_served_ = turn->first;
    return lend(turn->first, turn->second, worker, most, now);
  }
  return std::nullopt;
}

GrantedLease Queue::lend(StudyId id, Study& study, WorkerId worker, std::size_t most, Instant now) {
  GrantedLease granted{next_lease_++, id, {}};
  Lease& lease = leases_[granted.lease];
  lease.worker = worker;
  lease.study = id;
  lease.deadline = now + policy_.lease;
  lease.active = now;
  lease.alone = !study.suspects.empty();
  workers_[worker].push_back(granted.lease);
  while (granted.jobs.size() < most) {
    std::size_t index = 0;
    if (!study.suspects.empty()) {
      index = study.suspects.front();
      study.suspects.pop_front();
    } else if (!study.again.empty()) {
      index = study.again.front();
      study.again.pop_front();
    } else if (study.next < study.records.size()) {
      index = study.next++;
    } else {
      break;
    }
    Record& record = study.records[index];
    assert(record.state == State::waiting);
    record.state = State::leased;
    --study.counts.waiting;
    ++study.counts.leased;
    lease.jobs.push_back(record.id);
    granted.jobs.push_back({record.id, record.first_point, record.points, record.attempts});
  }
  return granted;
}

void Queue::heard(WorkerId worker, Instant now) {
  const auto own = workers_.find(worker);
  if (own == workers_.end()) return;
  for (const LeaseId id : own->second) {
    Lease& lease = leases_.at(id);
    lease.deadline = std::min(now + policy_.lease, lease.active + policy_.stall);
  }
}

std::optional<std::size_t> Queue::indexOf(const Study& study, std::uint64_t job) {
  const auto found = std::lower_bound(study.records.begin(), study.records.end(), job,
                                      [](const Record& record, std::uint64_t id) { return record.id < id; });
  if (found == study.records.end() || found->id != job) return std::nullopt;
  return static_cast<std::size_t>(found - study.records.begin());
}

std::optional<HeldJob> Queue::find(WorkerId worker, LeaseId lease, std::uint64_t job) const {
  const auto found = leases_.find(lease);
  if (found == leases_.end() || found->second.worker != worker) return std::nullopt;
  const std::vector<std::uint64_t>& jobs = found->second.jobs;
  if (std::find(jobs.begin(), jobs.end(), job) == jobs.end()) return std::nullopt;
  const Study& study = studies_.at(found->second.study);
  const Record& record = study.records[*indexOf(study, job)];
  return HeldJob{found->second.study, {record.id, record.first_point, record.points, record.attempts}};
}

/// Takes a held job out of its lease.
Queue::Held Queue::take(LeaseId lease, std::uint64_t job) {
  Lease& from = leases_.at(lease);
  std::erase(from.jobs, job);
  Study& study = studies_.at(from.study);
  Record& record = study.records[*indexOf(study, job)];
  --study.counts.leased;
  return {&study, &record};
}

void Queue::endIfEmpty(LeaseId lease) {
  const auto found = leases_.find(lease);
  if (!found->second.jobs.empty()) return;
  std::erase(workers_[found->second.worker], lease);
  leases_.erase(found);
}

void Queue::waitAgain(Study& study, std::size_t index) const {
  Record& record = study.records[index];
  record.state = State::waiting;
  ++study.counts.waiting;
  (record.losses >= policy_.losses ? study.suspects : study.again).push_back(index);
}

void Queue::returned(WorkerId worker, LeaseId lease, std::uint64_t job, Instant now) {
  if (!find(worker, lease, job)) return;
  const Held held = take(lease, job);
  held.record->state = State::returned;
  ++held.study->counts.returned;
  for (const LeaseId own : workers_[worker]) leases_.at(own).active = now;
  endIfEmpty(lease);
}

std::optional<JobFailed> Queue::error(WorkerId worker, LeaseId lease, std::uint64_t job,
                                      std::string_view reason, Instant now) {
  const std::optional<HeldJob> found = find(worker, lease, job);
  if (!found) return std::nullopt;
  const Held held = take(lease, job);
  for (const LeaseId own : workers_[worker]) leases_.at(own).active = now;
  endIfEmpty(lease);
  Record& record = *held.record;
  ++record.attempts;
  if (record.attempts < policy_.errors) {
    waitAgain(*held.study, static_cast<std::size_t>(held.record - held.study->records.data()));
    return std::nullopt;
  }
  record.state = State::failed;
  ++held.study->counts.failed;
  return JobFailed{
      found->study, {record.id, record.first_point, record.points, record.attempts}, std::string(reason)};
}

void Queue::giveBack(WorkerId worker, LeaseId lease, std::uint64_t job) {
  if (!find(worker, lease, job)) return;
  const Held held = take(lease, job);
  endIfEmpty(lease);
  waitAgain(*held.study, static_cast<std::size_t>(held.record - held.study->records.data()));
}

void Queue::committed(StudyId study, std::uint64_t job) {
  const auto found = studies_.find(study);
  if (found == studies_.end()) return;  // cancelled while the job was landing
  const std::optional<std::size_t> index = indexOf(found->second, job);
  assert(index);
  Record& record = found->second.records[*index];
  assert(record.state == State::returned);
  record.state = State::committed;
  --found->second.counts.returned;
  ++found->second.counts.committed;
}

void Queue::loseJob(Study& study, const Lease& lease, std::uint64_t job,
                    std::vector<Decision>& decisions) const {
  const std::size_t index = *indexOf(study, job);
  --study.counts.leased;
  {
    Record& record = study.records[index];
    const bool was_suspect = record.losses >= policy_.losses;
    if (!was_suspect) ++record.losses;
    if (!was_suspect || !lease.alone) {
      waitAgain(study, index);
      return;
    }
    if (record.points == 1) {
      record.state = State::returned;
      ++study.counts.returned;
      decisions.emplace_back(
          JobCrashed{lease.study, {record.id, record.first_point, 1, record.attempts}, lease.worker});
      return;
    }
    record.state = State::replaced;
  }
  // Copied: the records move when parts are added.
  const Record whole = study.records[index];
  const std::uint32_t first = firstHalf(whole.points);
  JobHalved halved{lease.study, whole.id, {}};
  halved.parts[0] = {study.next_job++, whole.first_point, first, whole.attempts};
  halved.parts[1] = {study.next_job++, whole.first_point + first, whole.points - first, whole.attempts};
  // Parts go behind the records that were never leased, which `next` counts off: those move to `again`.
  for (; study.next < study.records.size(); ++study.next) study.again.push_back(study.next);
  for (const QueuedJob& part : halved.parts) {
    Record record = whole;
    record.id = part.id;
    record.first_point = part.first_point;
    record.points = part.points;
    study.records.push_back(record);
    study.next = study.records.size();
    waitAgain(study, study.records.size() - 1);
  }
  decisions.emplace_back(halved);
}

void Queue::loseLease(LeaseId id, Losses& losses) {
  const auto found = leases_.find(id);
  const Lease lease = std::move(found->second);
  leases_.erase(found);
  losses.leases.push_back({lease.worker, id});
  Study& study = studies_.at(lease.study);
  for (const std::uint64_t job : lease.jobs) loseJob(study, lease, job, losses.decisions);
}

Losses Queue::lose(WorkerId worker) {
  Losses losses;
  const auto own = workers_.find(worker);
  if (own == workers_.end()) return losses;
  for (const LeaseId lease : own->second) loseLease(lease, losses);
  workers_.erase(own);
  return losses;
}

Losses Queue::expire(Instant now) {
  Losses losses;
  for (auto& [worker, own] : workers_) {
    std::vector<LeaseId> kept;
    for (const LeaseId lease : own) {
      if (leases_.at(lease).deadline > now)
        kept.push_back(lease);
      else
        loseLease(lease, losses);
    }
    own = std::move(kept);
  }
  return losses;
}

JobCounts Queue::counts(StudyId study) const {
  const auto found = studies_.find(study);
  return found == studies_.end() ? JobCounts{} : found->second.counts;
}

std::uint64_t Queue::waiting() const {
  std::uint64_t sum = 0;
  for (const auto& [id, study] : studies_) sum += study.counts.waiting;
  return sum;
}

std::size_t Queue::held(WorkerId worker) const {
  const auto own = workers_.find(worker);
  if (own == workers_.end()) return 0;
  std::size_t sum = 0;
  for (const LeaseId lease : own->second) sum += leases_.at(lease).jobs.size();
  return sum;
}

}  // namespace holdfast::coordinator
