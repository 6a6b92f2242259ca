// The coordinator's side towards workers: leases out, results in, faults settled.
#include <spdlog/spdlog.h>

#include <chrono>
#include <utility>

#include "coordinator/services/coordinator.hpp"
#include "proto/build_identity.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::size_t kMostReasonBytes = 1000;
constexpr std::size_t kMostNameBytes = 200;
constexpr std::uint32_t kMostThreads = 4096;

/// The result against the job it is of, as leased, and against the plan.
Status checkAnswer(const v1::Plan& plan, const QueuedJob& job, const v1::JobResult& result) {
  if (result.first_point() != job.first_point || result.points() != job.points)
    return Error{"it is of other points than its job"};
  return checkResult(plan, result);
}

double unixNow() {
  return std::chrono::duration<double>(std::chrono::system_clock::now().time_since_epoch()).count();
}

OutcomeCounts countOutcomes(const std::string& outcomes) {
  OutcomeCounts counts{};
  for (const char outcome : outcomes) ++counts[static_cast<unsigned char>(outcome)];
  return counts;
}

JobRecord recordOf(const QueuedJob& job) {
  JobRecord record;
  record.id = job.id;
  record.first_point = job.first_point;
  record.points = job.points;
  record.attempts = job.attempts;
  return record;
}

}  // namespace

grpc::Status Coordinator::join(const v1::Hello& hello, const std::shared_ptr<WorkerPort>& port,
                               WorkerId& worker) {
  if (hello.build() != buildIdentity())
    return {grpc::StatusCode::FAILED_PRECONDITION, "the worker's build is " +
                                                       hello.build().substr(0, kMostNameBytes) +
                                                       ", the coordinator's " + std::string(buildIdentity())};
  if (hello.data_digest() != library_->digest())
    return {grpc::StatusCode::FAILED_PRECONDITION, "the worker's fluid data are " +
                                                       hello.data_digest().substr(0, kMostNameBytes) +
                                                       ", the coordinator's " + library_->digest()};
  if (hello.threads() < 1 || hello.threads() > kMostThreads)
    return {grpc::StatusCode::INVALID_ARGUMENT, "threads must be 1 to 4096"};
  if (hello.worker().size() > kMostNameBytes || hello.processor().size() > kMostNameBytes)
    return {grpc::StatusCode::INVALID_ARGUMENT, "worker and processor must be at most 200 bytes"};

  v1::ToWorker welcome;
  welcome.mutable_welcome()->set_heartbeat_every_ms(
      static_cast<std::uint32_t>(options_.policy.lease.count() / 5));
  Ports ports{port};
  {
    const std::lock_guard lock(mutex_);
    worker = next_worker_++;
    Worker& added = workers_[worker];
    added.name = hello.worker() + " (" + hello.processor() + ")";
    added.threads = hello.threads();
    added.port = port;
    port->enqueue(std::move(welcome));
    topUp(worker, added, ports);
    spdlog::info("worker {} has joined with {} threads", added.name, added.threads);
  }
  for (const auto& touched : ports) touched->flush();
  return grpc::Status::OK;
}

grpc::Status Coordinator::hear(WorkerId worker, v1::FromWorker& message) {
  {
    const std::lock_guard lock(mutex_);
    queue_.heard(worker, std::chrono::steady_clock::now());
  }
  switch (message.what_case()) {
    case v1::FromWorker::kResult:
      return hearResult(worker, *message.mutable_result());
    case v1::FromWorker::kFailure:
      hearFailure(worker, message.failure());
      return grpc::Status::OK;
    case v1::FromWorker::kGiveBack:
      hearGiveBack(worker, message.give_back());
      return grpc::Status::OK;
    case v1::FromWorker::kHeartbeat:
      return grpc::Status::OK;
    case v1::FromWorker::kHello:
    case v1::FromWorker::WHAT_NOT_SET:
      break;
  }
  return {grpc::StatusCode::INVALID_ARGUMENT, "after Hello come results, failures, heartbeats and GiveBack"};
}

grpc::Status Coordinator::hearResult(WorkerId worker, v1::JobResult& result) {
  std::optional<HeldJob> held;
  std::shared_ptr<const v1::Plan> plan;
  {
    const std::lock_guard lock(mutex_);
    held = queue_.find(worker, result.lease(), result.job());
    if (held) plan = studies_.at(held->study).plan;
  }
  if (!held) return grpc::Status::OK;  // its lease has ended
  if (const Status checked = checkAnswer(*plan, held->job, result); !checked.ok()) {
    jobError(worker, result.lease(), result.job(), "result refused: " + checked.error().message);
    return grpc::Status::OK;
  }
  Landing landing;
  landing.study = held->study;
  landing.worker = worker;
  landing.attempts = held->job.attempts;
  landing.finished_unix = unixNow();
  landing.started_unix = landing.finished_unix - result.seconds();
  landing.outcomes = countOutcomes(result.outcome());
  const std::uint64_t lease = result.lease();
  const std::uint64_t job = result.job();
  landing.result = std::make_unique<const v1::JobResult>(std::move(result));
  Ports ports;
  {
    const std::lock_guard lock(mutex_);
    if (!queue_.find(worker, lease, job)) return grpc::Status::OK;
    queue_.returned(worker, lease, job, std::chrono::steady_clock::now());
    Worker& from = workers_.at(worker);
    landing.worker_name = from.name;
    // Under the lock: what is said to the writer of a study has to be in the order of what happened to it.
    writer_->land(std::move(landing));
    topUp(worker, from, ports);
  }
  for (const auto& port : ports) port->flush();
  return grpc::Status::OK;
}

void Coordinator::hearFailure(WorkerId worker, const v1::JobFailure& failure) {
  jobError(worker, failure.lease(), failure.job(),
           std::string_view(failure.reason()).substr(0, kMostReasonBytes));
}

void Coordinator::jobError(WorkerId worker, std::uint64_t lease, std::uint64_t job, std::string_view reason) {
  Ports ports;
  {
    const std::lock_guard lock(mutex_);
    const auto failed = queue_.error(worker, lease, job, reason, std::chrono::steady_clock::now());
    if (failed) decide(*failed);
    if (const auto from = workers_.find(worker); from != workers_.end()) topUp(worker, from->second, ports);
    topUpStarved(ports);
  }
  for (const auto& port : ports) port->flush();
}

void Coordinator::hearGiveBack(WorkerId worker, const v1::GiveBack& given) {
  Ports ports;
  {
    const std::lock_guard lock(mutex_);
    for (const std::uint64_t job : given.jobs()) queue_.giveBack(worker, given.lease(), job);
    // It is leaving: what it gave back is for the others.
    if (const auto from = workers_.find(worker); from != workers_.end()) {
      from->second.leaving = true;
      from->second.starved = false;
    }
    topUpStarved(ports);
  }
  for (const auto& port : ports) port->flush();
}

void Coordinator::leave(WorkerId worker) {
  Ports ports;
  {
    const std::lock_guard lock(mutex_);
    const auto gone = workers_.find(worker);
    if (gone == workers_.end()) return;
    spdlog::info("worker {} has left", gone->second.name);
    for (const Decision& decision : queue_.lose(worker).decisions) decide(decision);
    workers_.erase(worker);
    topUpStarved(ports);
  }
  for (const auto& port : ports) port->flush();
}

void Coordinator::topUp(WorkerId id, Worker& worker, Ports& ports) {
  while (!worker.leaving) {
    worker.starved = true;
    if (ending_ || failure_ || writer_->bytesWaiting() > options_.most_bytes_waiting) return;
    const std::size_t most = leaseSize(queue_.waiting(), workers_.size(), worker.threads, queue_.held(id));
    if (most == 0) {
      worker.starved = false;
      return;
    }
    const auto granted = queue_.grant(id, most, std::chrono::steady_clock::now());
    if (!granted) return;
    if (worker.knows.insert(granted->study).second) {
      v1::ToWorker message;
      message.mutable_study()->set_study(static_cast<std::uint64_t>(granted->study));
      *message.mutable_study()->mutable_plan() = *studies_.at(granted->study).plan;
      worker.port->enqueue(std::move(message));
    }
    v1::ToWorker message;
    v1::Lease& lease = *message.mutable_lease();
    lease.set_lease(granted->lease);
    lease.set_study(static_cast<std::uint64_t>(granted->study));
    lease.set_seconds(static_cast<std::uint32_t>(
        std::chrono::duration_cast<std::chrono::seconds>(options_.policy.lease).count()));
    for (const QueuedJob& job : granted->jobs) {
      v1::LeasedJob& leased = *lease.add_jobs();
      leased.set_job(job.id);
      leased.set_first_point(job.first_point);
      leased.set_points(job.points);
    }
    worker.port->enqueue(std::move(message));
    ports.push_back(worker.port);
  }
}

void Coordinator::topUpStarved(Ports& ports) {
  if (queue_.waiting() == 0) return;
  for (auto& [id, worker] : workers_)
    if (worker.starved) topUp(id, worker, ports);
}

/// A worker that was silent or hung is let go as a whole: if it still can, it joins again, with empty hands.
Coordinator::Ports Coordinator::expire(Instant now) {
  Ports gone;
  const Losses expired = queue_.expire(now);
  for (const Decision& decision : expired.decisions) decide(decision);
  for (const LeaseOfWorker& lost : expired.leases) {
    const auto worker = workers_.find(lost.worker);
    if (worker == workers_.end()) continue;
    spdlog::warn("worker {} has let its lease expire", worker->second.name);
    for (const Decision& decision : queue_.lose(lost.worker).decisions) decide(decision);
    gone.push_back(worker->second.port);
    workers_.erase(worker);
  }
  return gone;
}

void Coordinator::decide(const Decision& decision) {
  if (const auto* failed = std::get_if<JobFailed>(&decision)) {
    Study& study = studies_.at(failed->study);
    spdlog::warn("study {}: job {} has failed: {}", study.record.name, failed->job.id, failed->reason);
    JobRecord record = recordOf(failed->job);
    record.state = JobState::failed;
    record.failure = failed->reason;
    writer_->run([id = failed->study, record](Store& store) { return store.fail(id, record); });
    ++study.jobs_failed;
    finishIfDone(study);
  } else if (const auto* halved = std::get_if<JobHalved>(&decision)) {
    spdlog::warn("study {}: job {} was lost too often: halved", studies_.at(halved->study).record.name,
                 halved->job);
    writer_->run([halved = *halved](Store& store) {
      const std::array<JobRecord, 2> parts{recordOf(halved.parts[0]), recordOf(halved.parts[1])};
      return store.replaceJob(halved.study, halved.job, parts);
    });
  } else if (const auto* crashed = std::get_if<JobCrashed>(&decision)) {
    spdlog::warn("study {}: point {} killed worker after worker: given up as crashed",
                 studies_.at(crashed->study).record.name, crashed->job.first_point);
    const auto worker = workers_.find(crashed->worker);
    const std::string name = worker == workers_.end() ? "" : worker->second.name;
    writer_->run([this, crashed = *crashed, name](Store& store) {
      const Status stored = store.landCrashed(crashed.study, recordOf(crashed.job), name);
      if (!stored.ok()) return stored;
      const std::lock_guard lock(mutex_);
      queue_.committed(crashed.study, crashed.job.id);
      if (const auto study = studies_.find(crashed.study); study != studies_.end()) {
        OutcomeCounts outcomes{};
        outcomes[static_cast<std::size_t>(thermo::Outcome::crashed)] = 1;
        study->second.meter.landed(1, outcomes);
        finishIfDone(study->second);
      }
      return success();
    });
  }
}

void Coordinator::landed(std::span<const Landing> landings) {
  Ports ports;
  {
    const std::lock_guard lock(mutex_);
    for (const Landing& landing : landings) {
      queue_.committed(landing.study, landing.result->job());
      if (const auto study = studies_.find(landing.study); study != studies_.end()) {
        study->second.meter.landed(landing.result->points(), landing.outcomes);
        finishIfDone(study->second);
      }
      const auto worker = workers_.find(landing.worker);
      if (worker == workers_.end()) continue;
      v1::ToWorker message;
      message.mutable_landed()->set_lease(landing.result->lease());
      message.mutable_landed()->set_job(landing.result->job());
      worker->second.port->enqueue(std::move(message));
      ports.push_back(worker->second.port);
    }
    topUpStarved(ports);
  }
  for (const auto& port : ports) port->flush();
}

}  // namespace holdfast::coordinator
