// The coordinator's side towards clients: studies come, are followed, and go.
#include "coordinator/services/coordinator.hpp"

#include <spdlog/spdlog.h>

#include <algorithm>
#include <utility>

#include "coordinator/services/candidate_facts.hpp"
#include "proto/build_identity.hpp"

namespace holdfast::coordinator {
namespace {

constexpr std::size_t kMostStudyBytes = std::size_t{1} << 20;
constexpr std::chrono::milliseconds kTick{250};

/// Lease numbers must grow from one run on a store to the next: every opening has 2^40 of its own.
LeaseId firstLease(const Store& store) {
  return static_cast<LeaseId>(store.openings()) << 40U;
}

grpc::Status storeFailed(const Error& error) {
  return {grpc::StatusCode::INTERNAL, "store: " + error.message};
}

grpc::Status noSuchStudy(const std::string& name) {
  return {grpc::StatusCode::NOT_FOUND, "there is no study \"" + name.substr(0, 200) + "\""};
}

}  // namespace

Coordinator::Coordinator(Store store, std::shared_ptr<const thermo::FluidLibrary> library,
                         const CoordinatorOptions& options)
    : library_(std::move(library)), options_(options), queue_(options.policy, firstLease(store)) {
  writer_ = std::make_unique<Writer>(
      std::move(store), [this](std::span<const Landing> landings) { landed(landings); },
      [this](const Error& error) { broke(error); });
  timer_ = std::thread([this] { watch(); });
}

Coordinator::~Coordinator() {
  {
    const std::lock_guard lock(mutex_);
    ending_ = true;
  }
  changed_.notify_all();
  timer_.join();
  writer_->finish();
}

Result<std::unique_ptr<Coordinator>> Coordinator::start(Store store,
                                                        std::shared_ptr<const thermo::FluidLibrary> library,
                                                        const CoordinatorOptions& options) {
  auto records = store.studies();
  if (!records.ok()) return records.error();
  std::map<StudyId, OpenJobs> open;
  for (const StudyRecord& record : *records) {
    auto jobs = openJobs(store, record.id);
    if (!jobs.ok()) return jobs.error();
    open.emplace(record.id, std::move(*jobs));
  }
  std::unique_ptr<Coordinator> made(new Coordinator(std::move(store), std::move(library), options));
  const std::lock_guard lock(made->mutex_);
  for (StudyRecord& record : *records) {
    const StudyId id = record.id;
    const std::string identity = record.identity;
    Study& study = made->adopt(std::move(record));
    study.jobs_failed = open.at(id).failed;
    if (study.record.state != StudyState::running) continue;
    if (options.only && study.record.name != *options.only) {
      study.record.state = StudyState::paused;  // in memory alone: whoever serves the store goes on with it
      continue;
    }
    if (identity != identityOf(*study.plan, *made->library_, buildIdentity())) {
      // Its rows would not be of one kind.
      spdlog::warn("study {} was begun by another build or with other fluid data: paused", study.record.name);
      study.record.state = StudyState::paused;
      made->writer_->run([id](Store& owned) { return owned.setState(id, StudyState::paused); });
      continue;
    }
    spdlog::info("study {} goes on: {} of {} points are done", study.record.name, study.meter.pointsDone(),
                 study.plan->points());
    made->queue(study, open.at(id));
  }
  return made;
}

Result<Coordinator::OpenJobs> Coordinator::openJobs(Store& store, StudyId study) {
  auto jobs = store.jobs(study);
  if (!jobs.ok()) return jobs.error();
  OpenJobs open;
  for (const JobRecord& job : *jobs) {
    open.next_job = std::max(open.next_job, job.id + 1);
    if (job.state == JobState::failed) ++open.failed;
    if (job.state == JobState::failed || job.state == JobState::committed) continue;
    open.jobs.push_back({job.id, job.first_point, job.points, job.attempts});
  }
  std::sort(open.jobs.begin(), open.jobs.end(),
            [](const QueuedJob& left, const QueuedJob& right) { return left.id < right.id; });
  return open;
}

Coordinator::Study* Coordinator::find(const std::string& name) {
  for (auto& [id, study] : studies_)
    if (study.record.name == name) return &study;
  return nullptr;
}

Coordinator::Study& Coordinator::adopt(StudyRecord record) {
  Study study;
  study.plan = std::make_shared<const v1::Plan>(std::move(record.plan));
  study.meter = Meter(study.plan->points(), record.points_done);
  record.plan = {};
  record.text = {};
  study.record = std::move(record);
  const StudyId id = study.record.id;
  return studies_.insert_or_assign(id, std::move(study)).first->second;
}

void Coordinator::queue(Study& study, const OpenJobs& open) {
  study.record.state = StudyState::running;
  study.jobs_failed = open.failed;
  study.queued = true;
  queue_.addStudy(study.record.id, open.jobs, open.next_job);
  finishIfDone(study);
}

void Coordinator::unqueue(Study& study, Ports& ports) {
  if (!study.queued) return;
  study.queued = false;
  for (const LeaseOfWorker& ended : queue_.removeStudy(study.record.id)) {
    const auto worker = workers_.find(ended.worker);
    if (worker == workers_.end()) continue;
    v1::ToWorker message;
    message.mutable_withdraw()->set_lease(ended.lease);
    worker->second.port->enqueue(std::move(message));
    worker->second.starved = true;
    ports.push_back(worker->second.port);
  }
  topUpStarved(ports);
}

grpc::Status Coordinator::submit(const v1::SubmitRequest& request, v1::SubmitReply& reply) {
  if (request.text().size() > kMostStudyBytes)
    return {grpc::StatusCode::INVALID_ARGUMENT, "a study may have at most 1 MiB of text"};
  const StudyReading reading = readStudy(request.name(), request.text(), *library_, options_.limits);
  if (!reading.plan)
    return {grpc::StatusCode::INVALID_ARGUMENT, render(request.file_label(), reading.diagnostics)};
  const std::string identity = identityOf(*reading.plan, *library_, buildIdentity());
  reply.set_name(request.name());
  reply.set_points(reading.plan->points());

  const std::lock_guard one_at_a_time(submit_mutex_);
  Ports ports;
  bool is_new = true;
  bool drop = false;
  {
    const std::lock_guard lock(mutex_);
    if (Study* known = find(request.name())) {
      if (known->record.identity != identity) {
        if (!request.replace())
          return {
              grpc::StatusCode::ALREADY_EXISTS,
              "the store has a study \"" + request.name() +
                  "\" of another identity (another question, other fluid data or another build); replace it "
                  "or give this one another name"};
        drop = true;
      } else if (known->record.state == StudyState::running || known->record.state == StudyState::complete) {
        reply.set_points_done(known->meter.pointsDone());
        reply.set_state(std::string(nameOf(known->record.state)));
        return grpc::Status::OK;
      } else {
        is_new = false;
      }
    }
  }

  std::vector<CandidateFacts> facts;
  if (is_new) {
    auto made = candidateFacts(*reading.plan, *library_);
    if (!made.ok()) return {grpc::StatusCode::INVALID_ARGUMENT, made.error().message};
    facts = std::move(*made);
  }
  if (drop) {
    {
      const std::lock_guard lock(mutex_);
      Study* known = find(request.name());
      unqueue(*known, ports);
      studies_.erase(known->record.id);
    }
    for (const auto& port : ports) port->flush();
  }
  StudyRecord record;
  OpenJobs open;
  const Status stored = writer_->call([&](Store& store) -> Status {
    if (drop)
      if (Status dropped = store.drop(request.name()); !dropped.ok()) return dropped;
    auto all = store.studies();
    if (!all.ok()) return all.error();
    const auto known = std::find_if(all->begin(), all->end(),
                                    [&](const StudyRecord& one) { return one.name == request.name(); });
    if (known != all->end()) {
      record = std::move(*known);
      if (Status resumed = store.setState(record.id, StudyState::running); !resumed.ok()) return resumed;
    } else {
      auto added = store.add(*reading.plan, identity, request.text(), buildIdentity(), *library_, facts);
      if (!added.ok()) return added.error();
      record = std::move(*added);
    }
    auto jobs = openJobs(store, record.id);
    if (!jobs.ok()) return jobs.error();
    open = std::move(*jobs);
    return success();
  });
  if (!stored.ok()) return storeFailed(stored.error());

  ports.clear();
  {
    const std::lock_guard lock(mutex_);
    Study& study = adopt(std::move(record));
    queue(study, open);
    reply.set_points_done(study.meter.pointsDone());
    reply.set_state(std::string(nameOf(study.record.state)));
    topUpStarved(ports);
  }
  for (const auto& port : ports) port->flush();
  return grpc::Status::OK;
}

grpc::Status Coordinator::stop(const std::string& name, StudyState state) {
  const std::lock_guard one_at_a_time(submit_mutex_);
  Ports ports;
  StudyId id = 0;
  {
    const std::lock_guard lock(mutex_);
    Study* study = find(name);
    if (study == nullptr) return noSuchStudy(name);
    if (study->record.state == StudyState::complete || study->record.state == state) return grpc::Status::OK;
    id = study->record.id;
    unqueue(*study, ports);
  }
  for (const auto& port : ports) port->flush();
  // What was returned before stands in line before this.
  const Status stored = writer_->call([&](Store& store) { return store.setState(id, state); });
  {
    const std::lock_guard lock(mutex_);
    if (Study* study = find(name)) study->record.state = state;
  }
  changed_.notify_all();
  return stored.ok() ? grpc::Status::OK : storeFailed(stored.error());
}

grpc::Status Coordinator::cancel(const std::string& name, v1::CancelReply& reply) {
  const grpc::Status status = stop(name, StudyState::cancelled);
  if (const auto now = progress(name)) reply.set_state(now->state());
  return status;
}

grpc::Status Coordinator::pause(const std::string& name) {
  return stop(name, StudyState::paused);
}

v1::Progress Coordinator::progressOf(const Study& study) const {
  v1::Progress progress;
  progress.set_name(study.record.name);
  progress.set_state(std::string(nameOf(study.record.state)));
  progress.set_points(study.plan->points());
  progress.set_points_done(study.meter.pointsDone());
  if (study.record.state == StudyState::running) {
    progress.set_points_per_second(study.meter.pointsPerSecond());
    progress.set_seconds_left(study.meter.secondsLeft());
  }
  for (const std::uint64_t count : study.meter.outcomes()) progress.add_outcomes(count);
  progress.set_jobs_failed(study.jobs_failed);
  progress.set_workers(static_cast<std::uint32_t>(workers_.size()));
  return progress;
}

std::vector<v1::Progress> Coordinator::list() {
  const std::lock_guard lock(mutex_);
  std::vector<v1::Progress> all;
  for (const auto& [id, study] : studies_) all.push_back(progressOf(study));
  return all;
}

std::optional<v1::Progress> Coordinator::progress(const std::string& name) {
  const std::lock_guard lock(mutex_);
  const Study* study = find(name);
  if (study == nullptr) return std::nullopt;
  return progressOf(*study);
}

std::optional<v1::Progress> Coordinator::await(const std::string& name, std::chrono::milliseconds longest) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, longest, [&] {
    const Study* study = find(name);
    return failure_ || ending_ || study == nullptr || study->record.state != StudyState::running;
  });
  const Study* study = find(name);
  if (study == nullptr) return std::nullopt;
  return progressOf(*study);
}

grpc::Status Coordinator::follow(const std::string& name, const std::shared_ptr<Follower>& follower) {
  v1::Progress now;
  {
    const std::lock_guard lock(mutex_);
    const Study* study = find(name);
    if (study == nullptr) return noSuchStudy(name);
    now = progressOf(*study);
    if (study->record.state == StudyState::running) followers_.push_back({name, follower});
  }
  follower->tell(now);
  return grpc::Status::OK;
}

void Coordinator::finishIfDone(Study& study) {
  const StudyId id = study.record.id;
  if (!study.queued || queue_.counts(id).open() > 0) return;
  queue_.removeStudy(id);
  study.queued = false;
  writer_->run([this, id](Store& store) {
    const Status stored = store.setState(id, StudyState::complete);
    if (!stored.ok()) return stored;
    {
      const std::lock_guard lock(mutex_);
      const auto done = studies_.find(id);
      if (done != studies_.end()) {
        done->second.record.state = StudyState::complete;
        spdlog::info("study {} is complete: {} points, {} jobs failed", done->second.record.name,
                     done->second.meter.pointsDone(), done->second.jobs_failed);
      }
    }
    changed_.notify_all();
    return success();
  });
}

void Coordinator::watch() {
  std::unique_lock lock(mutex_);
  while (!ending_) {
    const Instant now = std::chrono::steady_clock::now();
    for (auto& [id, study] : studies_)
      if (study.queued) study.meter.sample(now);
    Ports ports;
    const Ports gone = expire(now);
    topUpStarved(ports);
    lock.unlock();
    for (const auto& port : gone) port->finish({grpc::StatusCode::ABORTED, "the lease has expired"});
    for (const auto& port : ports) port->flush();
    tellFollowers();
    lock.lock();
    changed_.wait_for(lock, kTick, [this] { return ending_; });
  }
}

void Coordinator::tellFollowers() {
  std::vector<std::pair<std::shared_ptr<Follower>, v1::Progress>> news;
  {
    const std::lock_guard lock(mutex_);
    std::erase_if(followers_, [&](const Following& following) {
      const Study* study = find(following.name);
      v1::Progress progress;
      if (study != nullptr) {
        progress = progressOf(*study);
      } else {  // replaced by another of its name
        progress.set_name(following.name);
        progress.set_state(std::string(nameOf(StudyState::cancelled)));
      }
      const bool over = progress.state() != nameOf(StudyState::running);
      news.emplace_back(following.follower, std::move(progress));
      return over || following.follower.use_count() == 2;  // ours and the one in `news`: nobody listens
    });
  }
  for (const auto& [follower, progress] : news) follower->tell(progress);
}

std::optional<Error> Coordinator::failure() {
  const std::lock_guard lock(mutex_);
  return failure_;
}

void Coordinator::broke(const Error& error) {
  spdlog::error("the store has failed: {}", error.message);
  {
    const std::lock_guard lock(mutex_);
    failure_ = error;
  }
  changed_.notify_all();
}

}  // namespace holdfast::coordinator
