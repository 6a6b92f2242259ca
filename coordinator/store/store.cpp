#include "coordinator/store/store.hpp"

#include <utility>

#include "coordinator/store/schema.hpp"
#include "coordinator/store/store_impl.hpp"

namespace holdfast::coordinator {
namespace {

constexpr int kPageSize = 16384;
/// The write-ahead log is moved into the file by a thread of its own each time it has grown by this much ...
constexpr int kWakePages = (8 << 20) / kPageSize;
/// ... the writer moves what is left, so that the log starts anew, from this size on ...
constexpr int kLogPages = (64 << 20) / kPageSize;
/// ... and where readers keep it from being started anew, they are waited for from this size on.
constexpr int kForcedLogPages = (512 << 20) / kPageSize;
constexpr int kReaderPatienceMilliseconds = 2000;

int noteLogPages(void* impl, sqlite3*, const char*, int pages) {
  static_cast<Store::Impl*>(impl)->log_pages = pages;
  return SQLITE_OK;
}

}  // namespace

std::string_view nameOf(StudyState state) {
  switch (state) {
    case StudyState::running:
      return "running";
    case StudyState::paused:
      return "paused";
    case StudyState::complete:
      return "complete";
    case StudyState::cancelled:
      return "cancelled";
  }
  return "";
}

std::string_view nameOf(JobState state) {
  switch (state) {
    case JobState::waiting:
      return "waiting";
    case JobState::leased:
      return "leased";
    case JobState::returned:
      return "returned";
    case JobState::committed:
      return "committed";
    case JobState::failed:
      return "failed";
  }
  return "";
}

Store::Store(std::unique_ptr<Impl> impl) : impl_(std::move(impl)) {}
Store::Store(Store&&) noexcept = default;
Store& Store::operator=(Store&&) noexcept = default;
Store::~Store() = default;

Result<Store> Store::open(const std::filesystem::path& file) {
  if (Status place = checkPlace(file); !place) return place.error();
  return guarded([&]() -> Result<Store> {
    auto lock = StoreLock::take(file);
    if (!lock) return lock.error();
    auto impl = std::make_unique<Impl>(file, std::move(*lock));
    if (Status prepared = impl->prepare(file); !prepared) return prepared.error();
    return Store(std::move(impl));
  });
}

Status Store::Impl::prepare(const std::filesystem::path& file) {
  const std::string name = "store " + file.string() + ": ";
  if (sqlite3_db_readonly(connection.handle(), "main") == 1)
    return Error{name + "it may not be written; make the file writable for you, or name another"};
  const std::int64_t application = connection.integer("PRAGMA application_id");
  const std::int64_t version = connection.integer("PRAGMA user_version");
  const bool empty =
      application == 0 && version == 0 && connection.integer("SELECT count(*) FROM sqlite_schema") == 0;
  if (!empty && application != kApplicationId)
    return Error{name + "this SQLite database was not made by holdfast; name another file"};
  if (!empty && version > kStoreVersion)
    return Error{name + "it was made by a later version of holdfast (layout " + std::to_string(version) +
                 ", this one knows " + std::to_string(kStoreVersion) +
                 "); use that version, or name another file"};

  // Page size counts only before the first page is written. NORMAL: a commit outlives the end of the program
  // however it ends; after a loss of power the last commits may be undone as wholes, rows and marks alike,
  // and their jobs wait again. Checkpoints, and so the end of a study, are on the disk. What is dropped need
  // not be overwritten with zeros.
  connection.execute("PRAGMA page_size = " + std::to_string(kPageSize));
  connection.execute(
      "PRAGMA journal_mode = WAL; PRAGMA synchronous = NORMAL; PRAGMA secure_delete = OFF;"
      "PRAGMA wal_autocheckpoint = 0; PRAGMA journal_size_limit = 67108864");
  sqlite3_wal_hook(connection.handle(), noteLogPages, this);
  forced_from = kForcedLogPages;

  Transaction transaction(connection);
  if (empty) createSchema(connection);
  connection.execute("UPDATE store SET opened = opened + 1");
  openings = static_cast<std::uint64_t>(connection.integer("SELECT opened FROM store"));
  transaction.commit();
  return success();
}

void Store::Impl::keepLogBounded() {
  if (log_pages < woken_at) woken_at = 0;
  if (log_pages - woken_at >= kWakePages) {
    woken_at = log_pages;
    checkpointer.wake();
  }
  if (log_pages < kLogPages) return;
  const auto alone = checkpointer.holdOff();
  sqlite3* const database = connection.handle();
  int left = 0, moved = 0;
  // Failure is no loss: the log stays and the next landing tries again.
  sqlite3_wal_checkpoint_v2(database, "main", SQLITE_CHECKPOINT_PASSIVE, &left, &moved);
  if (log_pages < forced_from) return;
  // Readers that never pause keep the log from being started anew: no new reader may begin on it until the
  // last of them has finished, or patience ends.
  sqlite3_busy_timeout(database, kReaderPatienceMilliseconds);
  const int code = sqlite3_wal_checkpoint_v2(database, "main", SQLITE_CHECKPOINT_RESTART, &left, &moved);
  sqlite3_busy_timeout(database, Connection::kPatienceMilliseconds);
  forced_from = code == SQLITE_OK ? kForcedLogPages : log_pages + kForcedLogPages;
}

std::uint64_t Store::openings() const {
  return impl_->openings;
}

}  // namespace holdfast::coordinator
