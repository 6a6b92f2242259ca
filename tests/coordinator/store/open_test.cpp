// Which files a store opens, which it refuses, and what it says then.
#include <gmock/gmock.h>
#include <sys/mount.h>

#include <cerrno>
#include <fstream>
#include <functional>
#include <iostream>

#include "coordinator/store/place.hpp"
#include "coordinator/store/schema.hpp"
#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

using testing::AllOf;
using testing::HasSubstr;

std::string refusal(const std::filesystem::path& file) {
  auto store = Store::open(file);
  return store.ok() ? "" : store.error().message;
}

TEST(Open, TellsAFileThatIsNoDatabase) {
  const Folder folder;
  const std::filesystem::path file = folder / "notes.sqlite";
  std::ofstream(file) << std::string(5000, 'x');
  EXPECT_THAT(refusal(file), AllOf(HasSubstr("notes.sqlite"), HasSubstr("not a SQLite database")));
}

TEST(Open, TellsADatabaseOfAnotherProgramAndLeavesItAlone) {
  const Folder folder;
  const std::filesystem::path file = folder / "addresses.sqlite";
  {
    Connection other(file);
    other.execute("CREATE TABLE address(name TEXT)");
  }
  EXPECT_THAT(refusal(file), HasSubstr("was not made by holdfast; name another file"));
  EXPECT_EQ(ask(file, "SELECT group_concat(name) FROM sqlite_schema"), "address");
  EXPECT_EQ(ask(file, "PRAGMA journal_mode"), "delete");
}

TEST(Open, TellsAStoreOfALaterVersion) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  openStore(file);
  ask(file, "PRAGMA user_version = " + std::to_string(kStoreVersion + 1));
  EXPECT_THAT(refusal(file), HasSubstr("made by a later version"));
}

TEST(Open, TakesAnEmptyFile) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  const std::ofstream empty(file);
  EXPECT_EQ(refusal(file), "");
  EXPECT_EQ(ask(file, "PRAGMA application_id"), std::to_string(kApplicationId));
}

TEST(Open, TellsAMissingFolderAndAFolderInPlaceOfAFile) {
  const Folder folder;
  EXPECT_THAT(refusal(folder / "not/there/x.sqlite"), HasSubstr("there is no folder"));
  EXPECT_THAT(refusal(folder / ""), HasSubstr("this is a folder; name a file"));
}

TEST(Open, OneCoordinatorAtATime) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  {
    Store first = openStore(file);
    EXPECT_THAT(refusal(file), AllOf(HasSubstr("is in use by process " + std::to_string(getpid())),
                                     HasSubstr("end that coordinator first")));
    // The refused attempt did not loosen the first one's hold.
    EXPECT_THAT(refusal(file), HasSubstr("is in use"));
    addStudy(first, planOf("x", 50, 64));
  }
  EXPECT_EQ(refusal(file), "");
  // A lock file that a killed coordinator left behind means nothing.
  std::ofstream(file.string() + ".lock") << "1";
  EXPECT_EQ(refusal(file), "");
}

TEST(Open, CountsItsOpenings) {
  const Folder folder;
  for (std::uint64_t time = 1; time <= 3; ++time) EXPECT_EQ(openStore(folder / "x.sqlite").openings(), time);
}

// linux/magic.h of the kernel.
TEST(Open, KnowsNetworkFileSystems) {
  EXPECT_TRUE(isNetworkFileSystem(0x6969, "nfs4"));
  EXPECT_TRUE(isNetworkFileSystem(0xFF534D42, "cifs"));
  EXPECT_TRUE(isNetworkFileSystem(0xFE534D42, "smb3"));
  EXPECT_TRUE(isNetworkFileSystem(0x65735546, "fuse.sshfs"));
  EXPECT_FALSE(isNetworkFileSystem(0x65735546, "fuseblk"));
  EXPECT_FALSE(isNetworkFileSystem(0xEF53, "ext4"));
  EXPECT_FALSE(isNetworkFileSystem(0x01021994, "tmpfs"));
  EXPECT_FALSE(isNetworkFileSystem(0x9123683E, "btrfs"));
}

TEST(Open, AReadOnlyStoreIsRefused) {
  if (geteuid() == 0) {
    std::cout << "SKIPPED: permissions do not bind root\n";
    GTEST_SKIP();
  }
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  openStore(file);
  std::filesystem::permissions(file, std::filesystem::perms::owner_read);
  EXPECT_THAT(refusal(file), HasSubstr("may not be written"));
}

/// What fills up: lands jobs until one fails, makes room, and lands the rest.
void fillAndGoOn(const std::filesystem::path& file, const v1::Plan& plan,
                 const std::function<void(bool full)>& limit) {
  {
    Store store = openStore(file);
    const StudyRecord study = addStudy(store, plan);
    limit(true);
    std::uint64_t landed = 0;
    std::string message;
    for (const JobRecord& job : jobsOf(store, study)) {
      const v1::JobResult result = resultOf(plan, job);
      const std::vector one = {finished(study.id, result)};
      message = messageOf(store.land(one));
      if (!message.empty()) break;
      landed += job.points;
    }
    EXPECT_THAT(message, AllOf(HasSubstr("no space left; free some"), HasSubstr("is kept")));
    // What was acknowledged is there, of the job that failed there is nothing, and the store goes on once
    // there is room.
    EXPECT_EQ(studiesOf(store)[0].points_done, landed);
    EXPECT_EQ(ask(file, "SELECT count(*) FROM points_x"), std::to_string(landed));
    limit(false);
    landAll(store, study);
  }
  EXPECT_EQ(ask(file, "PRAGMA integrity_check"), "ok");
  EXPECT_EQ(ask(file, "SELECT count(*), count(DISTINCT point) FROM points_x"),
            std::to_string(plan.points()) + "|" + std::to_string(plan.points()));
}

TEST(FullDisk, IsReportedAndTheStoreStaysWhole) {
  const Folder folder;
  const std::filesystem::path disk = folder / "disk";
  std::filesystem::create_directory(disk);
  if (mount("tmpfs", disk.c_str(), "tmpfs", 0, "size=6m") != 0) {
    std::cout << "SKIPPED: no right to mount a small disk (" << std::strerror(errno) << ")\n";
    GTEST_SKIP();
  }
  const std::filesystem::path filler = disk / "filler";
  fillAndGoOn(disk / "x.sqlite", planOf("x", 1000, 1024), [&](bool full) {
    if (full)
      std::ofstream(filler) << std::string(5 << 20, 'x');
    else
      std::filesystem::remove(filler);
  });
  umount(disk.c_str());
}

}  // namespace
}  // namespace holdfast::coordinator
