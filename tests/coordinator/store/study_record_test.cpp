// What a store says about a study, and what a person can ask of it with the stock shell.
#include <gmock/gmock.h>

#include <cstdio>

#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

using testing::HasSubstr;

/// What the sqlite3 shell, as the system has it, prints.
std::string shell(const std::filesystem::path& file, const std::string& question) {
  const std::string command = "sqlite3 '" + file.string() + "' \"" + question + "\" 2>&1";
  std::string printed;
  FILE* pipe = popen(command.c_str(), "r");
  std::array<char, 4096> buffer{};
  while (std::fgets(buffer.data(), buffer.size(), pipe) != nullptr) printed += buffer.data();
  EXPECT_EQ(pclose(pipe), 0) << printed;
  if (!printed.empty()) printed.pop_back();
  return printed;
}

TEST(StudyRecord, AStockShellReadsAFinishedStore) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  {
    Store store = openStore(file);
    const StudyRecord study = addStudy(store, planOf("x", 50, 64));
    landAll(store, study);
    expectSuccess(store.setState(study.id, StudyState::complete));
    // A shell reads while the coordinator still has the store.
    EXPECT_EQ(shell(file, "SELECT name, title, points, state FROM study"),
              "x|A title with a 'quote'|900|complete");
    EXPECT_EQ(std::filesystem::file_size(file.string() + "-wal"), 0U);
  }
  // The file stands alone.
  EXPECT_FALSE(std::filesystem::exists(file.string() + "-wal"));
  EXPECT_FALSE(std::filesystem::exists(file.string() + "-shm"));
  EXPECT_FALSE(std::filesystem::exists(file.string() + ".lock"));
  EXPECT_EQ(
      shell(file, "SELECT point, candidate, composition, phase, outcome, T, p, rho FROM x WHERE point = 151"),
      "151|R-290/R-600a|1|liquid|extrapolated|250.0|500000.0|151.001");
  EXPECT_EQ(
      shell(file, "SELECT state, count(*), sum(points), min(worker), min(finished_utc) FROM job GROUP BY 1"),
      "committed|15|900|host:1|2023-11-14T22:13:21.500Z");
  EXPECT_EQ(shell(file, "SELECT written_as, unit <> '' FROM quantity WHERE column_name = 'dh_dp_at_T'"),
            "(dh/dp)_T|1");
  EXPECT_EQ(shell(file, "SELECT count(*) FROM outcome WHERE meaning <> ''"), "8");
  EXPECT_EQ(shell(file, "SELECT group_concat(name, ' ') FROM phase"),
            "liquid vapour two-phase supercritical");
}

TEST(StudyRecord, CandidatesAndTheirCompositions) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  addStudy(store, planOf("x", 50, 64));
  EXPECT_EQ(ask(file, "SELECT id, label, equation, data_kind FROM candidate ORDER BY id"),
            "0|R-290|reference|pure\n1|R-290/R-600a|peng-robinson|published");
  EXPECT_EQ(ask(file, "SELECT candidate, fluid, state, T, h, s FROM reference_used WHERE candidate = 0"),
            "0|R-290|saturated liquid|273.15|200000.0|1000.0");
  EXPECT_EQ(ask(file, "SELECT candidate, count(*) FROM composition GROUP BY 1"), "0|1\n1|5");
  Connection connection(file);
  // Fractions sum to one, M = sum z M, w = z M_i / M: the definitions.
  Statement parts(
      connection.handle(),
      "SELECT sum(z), sum(w), sum(z * iif(fluid = 'R-290', 0.0441, 0.0581)) - M FROM composition_part "
      "JOIN composition ON composition.id = composition GROUP BY composition");
  int compositions = 0;
  for (; parts.row(); ++compositions) {
    EXPECT_NEAR(parts.real(0), 1, 1e-15);
    EXPECT_NEAR(parts.real(1), 1, 1e-15);
    EXPECT_NEAR(parts.real(2), 0, 1e-16);
  }
  EXPECT_EQ(compositions, 6);
  const thermo::Fluid& propane = **library().find("R-290");
  EXPECT_EQ(ask(file, "SELECT name, cas, safety_class, caution FROM fluid WHERE designation = 'R-290'"),
            propane.name + "|" + propane.cas + "|" + propane.safety_class + "|" + propane.caution);
}

TEST(StudyRecord, GwpOfABlendGoesByMass) {
  const auto& fluids = library().fluids();
  const auto assessed = std::ranges::find_if(
      fluids, [](const thermo::Fluid& f) { return f.label() != "R-290" && f.gwp100.value_or(0) > 0; });
  ASSERT_NE(assessed, fluids.end());
  v1::Plan plan = planOf("x", 50, 64);
  plan.mutable_candidates(1)->set_components(1, assessed->label());
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  addStudy(store, plan);
  Connection connection(file);
  Statement gwp(connection.handle(),
                "SELECT gwp100, (SELECT sum(w * fluid.gwp100) FROM composition_part JOIN fluid ON "
                "composition_part.fluid IN (designation, name) WHERE composition = composition.id) FROM "
                "composition WHERE candidate = 1 ORDER BY id");
  for (int composition = 0; composition < 5; ++composition) {
    ASSERT_TRUE(gwp.row());
    ASSERT_FALSE(gwp.isNull(0));
    EXPECT_DOUBLE_EQ(gwp.real(0), gwp.real(1));
    // The ends of the lattice are the pure fluids.
    if (composition == 0) {
      EXPECT_DOUBLE_EQ(gwp.real(0), assessed->gwp100.value());
    }
  }
}

TEST(StudyRecord, AnUnassessedPartLeavesGwpOfItsBlendsUnknown) {
  const auto& fluids = library().fluids();
  const auto unassessed = std::ranges::find_if(fluids, [](const thermo::Fluid& f) { return !f.gwp100; });
  ASSERT_NE(unassessed, fluids.end());
  v1::Plan plan = planOf("x", 50, 64);
  plan.mutable_candidates(1)->set_components(1, unassessed->label());
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  addStudy(store, plan);
  // Only where it is part of the blend: the last composition of the lattice is propane alone.
  EXPECT_EQ(
      ask(folder / "x.sqlite", "SELECT sum(gwp100 IS NULL), count(*) FROM composition WHERE candidate = 1"),
      "4|5");
}

TEST(StudyRecord, TheViewAddsWhatFollowsFromOtherColumns) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  const StudyRecord study = addStudy(store, planOf("x", 50, 64));
  landAll(store, study);
  Connection connection(file);
  // Definitions: v = 1/rho, h = u + p v, a = u - T s, g = h - T s.
  EXPECT_EQ(
      connection.integer("SELECT count(*) FROM x WHERE rho IS NOT NULL AND h IS NOT NULL AND s IS NOT NULL "
                         "AND abs(v * rho - 1) < 1e-15 AND abs(u + p * v - h) <= 1e-15 * (abs(h) + p * v) "
                         "AND abs(g - a - p * v) <= 1e-14 * (abs(h) + T * s + p * v)"),
      connection.integer("SELECT count(*) FROM points_x WHERE rho IS NOT NULL AND h IS NOT NULL AND s IS NOT "
                         "NULL"));
  EXPECT_EQ(ask(connection, "SELECT written_as FROM quantity WHERE column_name = 'v'"), "1/rho");
  // A question that needs no labels looks none up; one that does keeps the points in the outer loop.
  EXPECT_THAT(ask(connection, "EXPLAIN QUERY PLAN SELECT T, rho FROM x WHERE h > 1"),
              testing::Not(HasSubstr("composition")));
  const std::string by_label =
      ask(connection, "EXPLAIN QUERY PLAN SELECT T FROM x WHERE candidate = 'R-290'");
  EXPECT_LT(by_label.find("SCAN points"), by_label.find("composition")) << by_label;
}

TEST(StudyRecord, TheStoreExplainsItself) {
  const Folder folder;
  const std::filesystem::path file = folder / "x.sqlite";
  Store store = openStore(file);
  addStudy(store, planOf("x", 50, 64));
  EXPECT_THAT(shell(file, ".schema points_x"), HasSubstr("-- (dh/dp)_T in "));
  EXPECT_THAT(shell(file, ".schema fluid"), HasSubstr("local codes and licensed practice decide"));
}

TEST(StudyRecord, APlanComesBackAsItWas) {
  const Folder folder;
  const v1::Plan plan = planOf("x", 50, 64);
  {
    Store store = openStore(folder / "x.sqlite");
    addStudy(store, plan);
  }
  Store store = openStore(folder / "x.sqlite");
  const StudyRecord record = studiesOf(store).at(0);
  EXPECT_EQ(record.plan.SerializeAsString(), plan.SerializeAsString());
  EXPECT_EQ(record.text, "text of the study");
  EXPECT_EQ(record.identity, "identity");
  EXPECT_EQ(record.version, "0.1.0");
  EXPECT_EQ(record.state, StudyState::running);
}

TEST(StudyRecord, ADroppedStudyLeavesNothingBehind) {
  const Folder folder;
  const std::filesystem::path file = folder / "two.sqlite";
  Store store = openStore(file);
  const StudyRecord x = addStudy(store, planOf("x", 50, 64));
  landAll(store, x);
  v1::Plan of_y = planOf("y", 50, 64);
  of_y.mutable_candidates()->RemoveLast();
  of_y.set_points(150);
  const StudyRecord y = addStudy(store, of_y);
  landAll(store, y);
  expectSuccess(store.drop("x"));
  EXPECT_EQ(ask(file, "SELECT group_concat(name, ' ') FROM sqlite_schema WHERE name LIKE '%x' OR name = 'y'"),
            "y");
  for (const char* table :
       {"quantity", "candidate", "reference_used", "composition", "composition_part", "job"})
    EXPECT_EQ(
        ask(file, std::string("SELECT count(*) FROM ") + table + " WHERE study = " + std::to_string(x.id)),
        "0")
        << table;
  EXPECT_EQ(ask(file, "SELECT designation FROM fluid"), "R-290");
  EXPECT_EQ(ask(file, "SELECT count(*) FROM y"), "150");
  EXPECT_THAT(messageOf(store.drop("x")), HasSubstr("no study \"x\""));
  // The name is free again, the number is not: a late result of the old study cannot land in the new one.
  EXPECT_GT(addStudy(store, planOf("x", 50, 64)).id, y.id);
  const v1::JobResult late = resultOf(x.plan, {0, 0, 64, JobState::waiting, 0, ""});
  const std::vector jobs = {finished(x.id, late)};
  EXPECT_THAT(messageOf(store.land(jobs)), HasSubstr("no study of number"));
}

TEST(StudyRecord, NamesThatAreTakenAreRefused) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  addStudy(store, planOf("x", 50, 64));
  for (const auto& [name, message] : {std::pair("x", "has a study \"x\" already"),
                                      std::pair("phase", "the store itself uses the name phase"),
                                      std::pair("points_x", "the store itself uses the name points_x"),
                                      std::pair("sqlite_x", "the store itself uses the name sqlite_x")}) {
    const v1::Plan plan = planOf(name, 50, 64);
    const auto added = store.add(plan, "i", "t", "v", library(), factsOf(plan));
    ASSERT_FALSE(added.ok()) << name;
    EXPECT_THAT(added.error().message, HasSubstr(message));
  }
  EXPECT_EQ(studiesOf(store).size(), 1U);
}

TEST(StudyRecord, AFluidThatIsNotKnownIsRefused) {
  const Folder folder;
  Store store = openStore(folder / "x.sqlite");
  v1::Plan plan = planOf("x", 50, 64);
  plan.mutable_candidates(1)->set_components(1, "R-29O");
  EXPECT_FALSE(store.add(plan, "i", "t", "v", library(), factsOf(plan)).ok());
  EXPECT_TRUE(studiesOf(store).empty());
}

}  // namespace
}  // namespace holdfast::coordinator
