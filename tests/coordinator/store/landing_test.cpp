// Jobs land whole, once, and as records that SQLite copies undecoded.
#include <gmock/gmock.h>

#include "coordinator/store/points_table.hpp"
#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

using testing::HasSubstr;

TEST(Landing, EveryPointIsThereOnceWithItsAxisValuesAndColumns) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  const v1::Plan plan = planOf("x", 50, 64);
  {
    Store store = openStore(file);
    const StudyRecord study = addStudy(store, plan);
    landAll(store, study);
    EXPECT_EQ(studiesOf(store).at(0).points_done, plan.points());
  }
  Connection connection(file);
  EXPECT_EQ(ask(connection, "PRAGMA integrity_check"), "ok");
  EXPECT_EQ(connection.integer("SELECT count(*) FROM points_x"), static_cast<std::int64_t>(plan.points()));
  Statement rows(connection.handle(),
                 "SELECT point, composition, phase, outcome, T, p, rho, h, s, dh_dp_at_T FROM points_x");
  for (std::uint64_t point = 0; point < plan.points(); ++point) {
    ASSERT_TRUE(rows.row());
    ASSERT_EQ(rows.integer(0), static_cast<std::int64_t>(point));
    // 150 points a composition; T in steps of three points, p the fastest (points.hpp).
    ASSERT_EQ(rows.integer(1), static_cast<std::int64_t>(point / 150));
    ASSERT_EQ(rows.isNull(2), point % 5 == 0);
    ASSERT_EQ(rows.integer(2), static_cast<std::int64_t>(point % 5));
    ASSERT_EQ(rows.integer(3), static_cast<std::int64_t>(point % 2));
    const std::uint64_t step_of_T = point % 150 / 3;
    ASSERT_EQ(rows.real(4), 250 + 0.25 * static_cast<double>(step_of_T));
    ASSERT_EQ(rows.real(5), (std::array{1e5, 5e5, 20e5}[point % 3]));
    for (int c = 0; c < 4; ++c) {
      ASSERT_EQ(rows.isNull(6 + c), !presentAt(point, c));
      if (presentAt(point, c)) {
        ASSERT_EQ(rows.real(6 + c), valueAt(point, c));
      }
    }
  }
}

// SQLite's documented transfer optimisation: records go from b-tree to b-tree (RowCell, or RowData), no
// column is decoded (Column). Without it everything still works, several times slower: only the program shows
// it.
TEST(Landing, RecordsAreCopiedUndecoded) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  const v1::Plan plan = planOf("x", 50, 64);
  Store store = openStore(file);
  addStudy(store, plan);
  Connection connection(file);
  connection.execute("ATTACH ':memory:' AS image");
  std::string create_image = PointsTable::of(plan).value().createImageTable();
  create_image.replace(create_image.find("rows"), 4, "image.rows");
  connection.execute(create_image);
  Statement program(connection.handle(), "EXPLAIN INSERT INTO main.points_x SELECT * FROM image.rows");
  bool copies = false, decodes = false;
  while (program.row()) {
    copies |= program.text(1) == "RowCell" || program.text(1) == "RowData";
    decodes |= program.text(1) == "Column";
  }
  EXPECT_TRUE(copies);
  EXPECT_FALSE(decodes);
}

TEST(Landing, AJobLandsOnlyOnce) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  const std::vector<JobRecord> jobs = jobsOf(store, study);
  const v1::JobResult first = resultOf(study.plan, jobs[0]), second = resultOf(study.plan, jobs[1]);
  const std::vector once = {finished(study.id, first)};
  expectSuccess(store.land(once));
  EXPECT_THAT(messageOf(store.land(once)), HasSubstr("no waiting job of this number"));
  // All or none: the second job did not slip in beside the first.
  const std::vector both = {finished(study.id, second), finished(study.id, first)};
  EXPECT_FALSE(store.land(both));
  EXPECT_EQ(jobsOf(store, study)[1].state, JobState::waiting);
  const std::vector twice = {finished(study.id, second), finished(study.id, second)};
  EXPECT_FALSE(store.land(twice));
  EXPECT_EQ(ask(folder / "x.sqlite", "SELECT count(*) FROM points_x"), "64");
}

TEST(Landing, JobsOfSeveralStudiesLandTogether) {
  const Folder folder;
  Store store = openStore(folder / "two.sqlite");
  const StudyRecord x = addStudy(store, planOf("x", 50, 64));
  const StudyRecord y = addStudy(store, planOf("y", 30, 128, {"u", "cp"}));
  const v1::JobResult of_x = resultOf(x.plan, jobsOf(store, x)[0]);
  const v1::JobResult of_y = resultOf(y.plan, jobsOf(store, y)[0]);
  const std::vector jobs = {finished(x.id, of_x), finished(y.id, of_y)};
  expectSuccess(store.land(jobs));
  EXPECT_EQ(
      ask(folder / "two.sqlite", "SELECT (SELECT count(*) FROM points_x), (SELECT count(*) FROM points_y)"),
      "64|128");
}

// SQLite's write-ahead log starts anew once all of it has been moved into the file: it must not grow with the
// study.
TEST(Landing, TheWriteAheadLogStaysBounded) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  std::vector<std::string> columns;
  for (const char of : std::string("Tpvuhsag"))
    for (const char by : std::string("Tpv"))
      for (const char held : std::string("sh"))
        if (of != by && of != held) columns.push_back(std::string("(d") + of + "/d" + by + ")_" + held);
  const v1::Plan plan = planOf("x", 18'000, 8192, columns);  // 324,000 rows of about 350 bytes: 110 MB
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, plan);
  landAll(store, study, 4);
  EXPECT_GT(std::filesystem::file_size(file), 50U << 20);
  // The cap, 64 MiB, and the transaction that went beyond it.
  EXPECT_LT(std::filesystem::file_size(file.string() + "-wal"), 80U << 20);
}

TEST(Landing, AnAxisThatIsCollectedTooIsStoredOnce) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, planOf("x", 50, 64, {"T", "rho"}));
  landAll(store, study);
  EXPECT_EQ(ask(file, "SELECT group_concat(name, ' ') FROM pragma_table_info('points_x')"),
            "point composition phase outcome T p rho");
  EXPECT_EQ(ask(file, "SELECT T, rho FROM points_x WHERE point = 4"), "250.25|4.002");
}

TEST(Landing, ALoneCrashedPointHasAnOutcomeAndNoNumbers) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  const JobRecord job = jobsOf(store, study)[1];
  const std::vector<JobRecord> parts = {{100, 64, 1, JobState::waiting, 2, ""},
                                        {101, 65, 63, JobState::waiting, 2, ""}};
  expectSuccess(store.replaceJob(study.id, job.id, parts));
  expectSuccess(store.landCrashed(study.id, parts[0], "host:1"));
  EXPECT_EQ(ask(file, "SELECT point, outcome, phase, T, p, rho, h FROM x"), "64|crashed||255.25|500000.0||");
}

TEST(Landing, AbsencesAreKeptOnce) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  const std::vector<JobRecord> jobs = jobsOf(store, study);
  std::vector<v1::JobResult> results;
  for (int i = 0; i < 2; ++i) {
    results.push_back(resultOf(study.plan, jobs[static_cast<std::size_t>(i)]));
    v1::AbsentColumn* absent = results.back().add_absences();
    absent->set_candidate(1);
    absent->set_phase(static_cast<std::uint32_t>(thermo::Phase::two_phase));
    absent->set_column(3);
    absent->set_reason("p and T depend on each other there");
  }
  const std::vector landed = {finished(study.id, results[0]), finished(study.id, results[1])};
  expectSuccess(store.land(landed));
  EXPECT_EQ(
      ask(file, "SELECT candidate, phase.name, column_name, reason FROM absence JOIN phase ON code = phase"),
      "1|two-phase|dh_dp_at_T|p and T depend on each other there");
}

/// One way in which a result does not fit its plan, and what is said about it.
struct Fault {
  const char* name;
  void (*spoil)(v1::JobResult&);
  const char* message;
};

class Malformed : public testing::TestWithParam<Fault> {};

TEST_P(Malformed, IsRefusedAndNothingIsWritten) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  v1::JobResult good = resultOf(study.plan, jobsOf(store, study)[0]);
  v1::JobResult bad = resultOf(study.plan, jobsOf(store, study)[1]);
  GetParam().spoil(bad);
  const std::vector jobs = {finished(study.id, good), finished(study.id, bad)};
  EXPECT_THAT(messageOf(store.land(jobs)), HasSubstr(GetParam().message));
  EXPECT_EQ(ask(file, "SELECT count(*) FROM points_x"), "0");
  EXPECT_EQ(studiesOf(store)[0].points_done, 0U);
}

void putFirst(v1::JobResult& result, double value) {
  std::memcpy(result.mutable_columns(0)->mutable_values()->data() + sizeof value, &value, sizeof value);
}

INSTANTIATE_TEST_SUITE_P(
    Faults, Malformed,
    testing::Values(
        Fault{"NoPoints", [](v1::JobResult& r) { r.set_points(0); }, "has no points"},
        Fault{"BeyondTheStudy", [](v1::JobResult& r) { r.set_first_point(1ULL << 60); },
              "not all in the study"},
        Fault{"ShortPhases", [](v1::JobResult& r) { r.mutable_phase()->pop_back(); }, "63 phases where 64"},
        Fault{"ShortOutcomes", [](v1::JobResult& r) { r.mutable_outcome()->pop_back(); },
              "63 outcomes where 64"},
        Fault{"UnknownPhase", [](v1::JobResult& r) { (*r.mutable_phase())[3] = 5; }, "no phase has code 5"},
        Fault{"UnknownOutcome", [](v1::JobResult& r) { (*r.mutable_outcome())[3] = '\xFF'; },
              "no outcome has code 255"},
        Fault{"MissingColumn", [](v1::JobResult& r) { r.mutable_columns()->RemoveLast(); },
              "3 columns where 4"},
        Fault{"ShortColumn", [](v1::JobResult& r) { r.mutable_columns(1)->mutable_values()->pop_back(); },
              "column h has 511 bytes where 512"},
        Fault{"LongPresence",
              [](v1::JobResult& r) { r.mutable_columns(1)->mutable_presence()->push_back('x'); },
              "column h has 9 presence bytes where 8"},
        Fault{"Infinite", [](v1::JobResult& r) { putFirst(r, std::numeric_limits<double>::infinity()); },
              "column rho has a value that is not finite at point 65"},
        Fault{"NotANumber", [](v1::JobResult& r) { putFirst(r, std::numeric_limits<double>::quiet_NaN()); },
              "column rho has a value that is not finite at point 65"},
        Fault{"NumbersWithoutAState",
              [](v1::JobResult& r) {
                (*r.mutable_outcome())[1] = static_cast<char>(thermo::Outcome::no_convergence);
              },
              "has a value at point 65, whose outcome has no numbers"},
        Fault{"AbsenceOfNoColumn",
              [](v1::JobResult& r) {
                r.add_absences()->set_column(4);
                r.mutable_absences(0)->set_reason("so");
              },
              "names a candidate, phase or column that is not there"},
        Fault{"AbsenceWithoutReason", [](v1::JobResult& r) { r.add_absences(); }, "gives no reason"},
        Fault{"OtherPoints", [](v1::JobResult& r) { r.set_first_point(0); },
              "no waiting job of this number"}),
    [](const testing::TestParamInfo<Fault>& info) { return info.param.name; });

}  // namespace
}  // namespace holdfast::coordinator
