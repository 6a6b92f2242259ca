#include "worker/join/session.hpp"

#include <spdlog/spdlog.h>

#include <algorithm>
#include <optional>
#include <utility>

#include "proto/build_identity.hpp"

namespace holdfast::worker {
namespace {

constexpr std::size_t kTilePoints = 64;
constexpr std::size_t kMostReasonBytes = 1000;
/// How often the reasons to leave are looked at: a signal handler can set a flag, not wake a thread.
constexpr std::chrono::milliseconds kGlance{20};

/// How long the coordinator may take to close the stream after the worker has.
constexpr std::chrono::seconds kPatience{5};

std::size_t tilesOf(const v1::LeasedJob& job) {
  return (job.points() + kTilePoints - 1) / kTilePoints;
}

/// The kind of kernel this processor runs, for the record.
std::string processorKind() {
  __builtin_cpu_init();
  if (__builtin_cpu_supports("avx512f") != 0) return "avx512";
  if (__builtin_cpu_supports("avx2") != 0 && __builtin_cpu_supports("fma") != 0) return "avx2";
  return "baseline";
}

}  // namespace

Session::Session(const std::shared_ptr<grpc::Channel>& channel, const thermo::FluidLibrary& library,
                 const JoinOptions& options, const Leaving& leaving)
    : library_(library),
      options_(options),
      leaving_(leaving),
      stub_(v1::Work::NewStub(channel)),
      arena_(static_cast<int>(options.threads), 0) {}

grpc::Status Session::serve() {
  stream_ = stub_->Join(&context_);
  v1::FromWorker first;
  v1::Hello& hello = *first.mutable_hello();
  hello.set_build(std::string(buildIdentity()));
  hello.set_data_digest(library_.digest());
  hello.set_worker(options_.name);
  hello.set_threads(options_.threads);
  hello.set_processor(processorKind());
  send(first);
  std::thread receiver([this] { receive(); });
  std::thread heart([this] { beat(); });

  std::unique_lock lock(mutex_);
  while (!stream_ended_ && !leaving_.soon && !leaving_.now) changed_.wait_for(lock, kGlance);
  if (!stream_ended_) {
    lock.unlock();
    leave();
    lock.lock();
  }
  // Whatever is still being computed nobody waits for.
  leaves_ = true;
  line_.clear();
  for (const JobPointer& job : in_hand_) {
    job->withdrawn = true;
    job->stop = true;
  }
  if (!changed_.wait_for(lock, kPatience, [this] { return stream_ended_; })) context_.TryCancel();
  changed_.wait(lock, [this] { return tasks_ == 0 && stream_ended_; });
  lock.unlock();
  changed_.notify_all();
  receiver.join();
  heart.join();
  return stream_->Finish();
}

/// Gives back what was not begun, waits for what was, and closes the stream.
void Session::leave() {
  std::deque<JobPointer> not_begun;
  {
    const std::lock_guard lock(mutex_);
    leaves_ = true;
    not_begun.swap(line_);
  }
  v1::FromWorker nothing;  // to be leased no more, also if there is nothing to give back
  nothing.mutable_give_back();
  send(nothing);
  for (const JobPointer& job : not_begun) giveBack(*job);
  {
    std::unique_lock lock(mutex_);
    while (tasks_ > 0 && !stream_ended_) {
      if (leaving_.now)
        for (const JobPointer& job : in_hand_) job->stop = true;
      changed_.wait_for(lock, kGlance);
    }
  }
  const std::lock_guard sending(send_mutex_);
  closed_ = true;
  stream_->WritesDone();
}

void Session::receive() {
  v1::ToWorker message;
  while (stream_->Read(&message)) {
    switch (message.what_case()) {
      case v1::ToWorker::kWelcome: {
        const std::lock_guard lock(mutex_);
        heartbeat_ = std::chrono::milliseconds(std::max(message.welcome().heartbeat_every_ms(), 10U));
        welcome_ = true;
        break;
      }
      case v1::ToWorker::kStudy:
        prepare(message.study());
        break;
      case v1::ToWorker::kLease:
        take(message.lease());
        break;
      case v1::ToWorker::kWithdraw:
        withdraw(message.withdraw().lease());
        break;
      case v1::ToWorker::kLanded:
      case v1::ToWorker::WHAT_NOT_SET:
        break;
    }
  }
  const std::lock_guard lock(mutex_);
  stream_ended_ = true;
  changed_.notify_all();
}

void Session::prepare(const v1::StudyPlan& study) {
  // Within the arena, so that making the candidates takes no more threads than the jobs do.
  std::optional<Result<std::shared_ptr<const PreparedStudy>>> prepared;
  arena_.execute([&] { prepared = options_.prepare(study.plan(), library_); });
  if (!prepared->ok()) spdlog::error("study {}: {}", study.plan().name(), prepared->error().message);
  const std::lock_guard lock(mutex_);
  studies_.insert_or_assign(study.study(), std::move(*prepared));
}

void Session::take(const v1::Lease& lease) {
  std::deque<JobPointer> unwanted;
  {
    const std::lock_guard lock(mutex_);
    for (const v1::LeasedJob& leased : lease.jobs()) {
      auto job = std::make_shared<Job>();
      job->lease = lease.lease();
      job->study = lease.study();
      job->job = leased;
      (leaves_ ? unwanted : line_).push_back(std::move(job));
    }
    startJobs();
  }
  for (const JobPointer& job : unwanted) giveBack(*job);
}

void Session::withdraw(std::uint64_t lease) {
  const std::lock_guard lock(mutex_);
  std::erase_if(line_, [lease](const JobPointer& job) { return job->lease == lease; });
  for (const JobPointer& job : in_hand_) {
    if (job->lease != lease) continue;
    job->withdrawn = true;
    job->stop = true;
  }
}

void Session::startJobs() {
  // Two at least: while the last tiles of one are computed, the other keeps the rest of the threads busy.
  while (!leaves_ && !line_.empty() && (in_hand_.size() < 2 || tiles_in_hand_ < 2 * options_.threads)) {
    JobPointer job = std::move(line_.front());
    line_.pop_front();
    in_hand_.push_back(job);
    tiles_in_hand_ += tilesOf(job->job);
    ++tasks_;
    arena_.enqueue([this, job = std::move(job)] {
      // Isolated: a thread that waits for this job's tiles must not begin another job on top of it.
      tbb::this_task_arena::isolate([&] { compute(job); });
      const std::lock_guard lock(mutex_);
      --tasks_;
      changed_.notify_all();
    });
  }
}

void Session::compute(const JobPointer& job) {
  std::optional<Result<std::shared_ptr<const PreparedStudy>>> study;
  {
    const std::lock_guard lock(mutex_);
    if (const auto found = studies_.find(job->study); found != studies_.end()) study = found->second;
  }
  Result<v1::JobResult> result = Error{"the study's plan did not come before its lease"};
  if (study && !study->ok()) result = study->error();
  if (study && study->ok()) result = (**study)->evaluate(job->job, job->stop);

  bool withdrawn = false;
  {
    const std::lock_guard lock(mutex_);
    std::erase(in_hand_, job);
    tiles_in_hand_ -= tilesOf(job->job);
    withdrawn = job->withdrawn;
    startJobs();
  }
  if (withdrawn) return;
  v1::FromWorker message;
  if (result.ok()) {
    *message.mutable_result() = std::move(*result);
    message.mutable_result()->set_lease(job->lease);
  } else if (job->stop) {
    giveBack(*job);
    return;
  } else {
    message.mutable_failure()->set_lease(job->lease);
    message.mutable_failure()->set_job(job->job.job());
    message.mutable_failure()->set_reason(result.error().message.substr(0, kMostReasonBytes));
  }
  send(message);
}

void Session::giveBack(const Job& job) {
  v1::FromWorker message;
  message.mutable_give_back()->set_lease(job.lease);
  message.mutable_give_back()->add_jobs(job.job.job());
  send(message);
}

void Session::send(const v1::FromWorker& message) {
  const std::lock_guard lock(send_mutex_);
  // Whether it went out does not matter here: if it did not, the stream has ended and the receiver sees it.
  if (!closed_) stream_->Write(message);
}

void Session::beat() {
  v1::FromWorker message;
  message.mutable_heartbeat();
  std::unique_lock lock(mutex_);
  for (;;) {
    const auto next = std::chrono::steady_clock::now() + heartbeat_;
    changed_.wait_until(lock, next, [this] { return stream_ended_; });
    if (stream_ended_) return;
    lock.unlock();
    send(message);
    lock.lock();
  }
}

}  // namespace holdfast::worker
