#include "coordinator/services/writer.hpp"

#include <future>
#include <set>
#include <utility>

namespace holdfast::coordinator {
namespace {

/// Results of one transaction: COMMIT is a trip to the disk, so several share one while they wait anyway.
constexpr std::size_t kMostBytesOfBatch = std::size_t{32} << 20;

std::size_t bytesOf(const Landing& landing) {
  std::size_t bytes = landing.result->phase().size() + landing.result->outcome().size();
  for (const v1::ColumnData& column : landing.result->columns())
    bytes += column.values().size() + column.presence().size();
  return bytes;
}

}  // namespace

Writer::Writer(Store store, Landed landed, Broken broken)
    : store_(std::move(store)), landed_(std::move(landed)), broken_(std::move(broken)) {
  thread_ = std::thread([this] { work(); });
}

void Writer::finish() {
  if (!thread_.joinable()) return;
  {
    const std::lock_guard lock(mutex_);
    ending_ = true;
  }
  changed_.notify_one();
  thread_.join();
}

void Writer::land(Landing landing) {
  bytes_waiting_ += bytesOf(landing);
  {
    const std::lock_guard lock(mutex_);
    line_.emplace_back(std::move(landing));
  }
  changed_.notify_one();
}

void Writer::run(std::function<Status(Store&)> action) {
  {
    const std::lock_guard lock(mutex_);
    line_.emplace_back(std::move(action));
  }
  changed_.notify_one();
}

Status Writer::call(const std::function<Status(Store&)>& action) {
  std::promise<Status> done;
  run([&](Store& store) {
    done.set_value(is_broken_ ? Status(Error{"the store has failed"}) : action(store));
    return success();
  });
  return done.get_future().get();
}

void Writer::work() {
  std::unique_lock lock(mutex_);
  for (;;) {
    changed_.wait(lock, [this] { return ending_ || !line_.empty(); });
    if (line_.empty()) return;
    if (auto* action = std::get_if<Action>(&line_.front())) {
      const Action taken = std::move(*action);
      line_.pop_front();
      lock.unlock();
      if (const Status status = taken(store_); !status.ok()) breakDown(status.error());
      lock.lock();
      continue;
    }
    std::vector<Landing> batch;
    std::size_t bytes = 0;
    std::set<StudyId> studies;
    while (!line_.empty() && bytes < kMostBytesOfBatch) {
      auto* landing = std::get_if<Landing>(&line_.front());
      if (landing == nullptr) break;
      studies.insert(landing->study);
      if (studies.size() > kMostStudiesOfLanding) break;
      bytes += bytesOf(*landing);
      batch.push_back(std::move(*landing));
      line_.pop_front();
    }
    lock.unlock();
    landBatch(std::move(batch));
    bytes_waiting_ -= bytes;
    lock.lock();
  }
}

void Writer::landBatch(std::vector<Landing> batch) {
  if (is_broken_) return;
  std::vector<FinishedJob> jobs;
  jobs.reserve(batch.size());
  for (const Landing& landing : batch) {
    FinishedJob job;
    job.study = landing.study;
    job.result = landing.result.get();
    job.worker = landing.worker_name;
    job.attempts = landing.attempts;
    job.started_unix = landing.started_unix;
    job.finished_unix = landing.finished_unix;
    jobs.push_back(std::move(job));
  }
  if (const Status status = store_.land(jobs); !status.ok())
    breakDown(status.error());
  else
    landed_(batch);
}

void Writer::breakDown(const Error& error) {
  if (std::exchange(is_broken_, true)) return;
  broken_(error);
}

}  // namespace holdfast::coordinator
