// Every study of studies/ at reduced size, with the questions beside it.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <fstream>
#include <iterator>
#include <regex>

#include "tests/support/process.hpp"
#include "tests/support/stand_in.hpp"

namespace holdfast {
namespace {

std::vector<std::string> studyNames() {
  std::vector<std::string> names;
  for (const auto& entry : std::filesystem::directory_iterator(HOLDFAST_SOURCE_DIR "/studies"))
    if (entry.path().extension() == ".toml") names.push_back(entry.path().stem().string());
  return names;
}

std::string textOf(const std::filesystem::path& file) {
  std::ifstream in(file);
  return {std::istreambuf_iterator<char>(in), {}};
}

/// Axes of at most 13 values, lattices of at most 4 steps.
std::string reduced(const std::string& text) {
  std::string out;
  std::istringstream lines(text);
  std::smatch match;
  for (std::string line; std::getline(lines, line);) {
    if (std::regex_match(line, match, std::regex(R"((count|lattice)\s*=\s*(\d+)(.*))")))
      line = match[1].str() + " = " +
             std::to_string(std::min(std::stoi(match[2]), match[1] == "count" ? 13 : 4));
    out += line + "\n";
  }
  return out;
}

/// Runs all statements of a file of questions; what is wrong with them, or nothing.
std::string ask(const std::filesystem::path& store, const std::string& questions, int& answers) {
  sqlite3* database = nullptr;
  if (sqlite3_open_v2(store.c_str(), &database, SQLITE_OPEN_READWRITE, nullptr) != SQLITE_OK)
    return sqlite3_errmsg(database);
  std::string wrong;
  std::string statements;
  std::istringstream lines(questions);
  for (std::string line; std::getline(lines, line);)
    if (!line.starts_with(".")) statements += line + "\n";  // the shell's own commands
  const char* rest = statements.c_str();
  while (*rest != '\0' && wrong.empty()) {
    sqlite3_stmt* statement = nullptr;
    if (sqlite3_prepare_v2(database, rest, -1, &statement, &rest) != SQLITE_OK) {
      wrong = sqlite3_errmsg(database);
      break;
    }
    int step = SQLITE_DONE;
    while (statement != nullptr && (step = sqlite3_step(statement)) == SQLITE_ROW) ++answers;
    if (step != SQLITE_DONE) wrong = sqlite3_errmsg(database);
    sqlite3_finalize(statement);
  }
  sqlite3_close(database);
  return wrong;
}

class StudiesTest : public testing::TestWithParam<std::string> {};

TEST_P(StudiesTest, RunsAndItsQuestionsHaveAnswers) {
  const std::filesystem::path studies = HOLDFAST_SOURCE_DIR "/studies";
  const tests::TemporaryFolder folder;
  std::ofstream(folder / (GetParam() + ".toml")) << reduced(textOf(studies / (GetParam() + ".toml")));
  const auto store = folder / "store";
  tests::Process process({tests::program("holdfast"), "run", (folder / (GetParam() + ".toml")).string(),
                          "--store", store.string()},
                         folder / "log");
  ASSERT_EQ(process.wait(), 0) << process.output();
  const auto numbers =
      tests::query(store, "SELECT count(*) FROM points_" + GetParam() + " WHERE outcome IN (0, 1)");
  EXPECT_NE(numbers.at(0).at(0), "0");
  int answers = 0;
  EXPECT_EQ(ask(store, textOf(studies / (GetParam() + ".sql")), answers), "");
  EXPECT_GT(answers, 0);
}

INSTANTIATE_TEST_SUITE_P(All, StudiesTest, testing::ValuesIn(studyNames()),
                         [](const auto& info) { return info.param; });

}  // namespace
}  // namespace holdfast
