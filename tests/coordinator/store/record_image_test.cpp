// The image against SQLite itself: integrity_check reads every page and cell by the file format, and the
// values must be those that went in.
#include "coordinator/store/record_image.hpp"

#include <gmock/gmock.h>

#include <bit>
#include <fstream>

#include "tests/coordinator/store/store_support.hpp"

namespace holdfast::coordinator {
namespace {

struct Shape {
  std::size_t rows;
  std::size_t reals;
  std::uint64_t first_point;
};

/// Rows whose every number follows from row and column.
struct Content {
  std::vector<std::int64_t> composition;
  std::string phase, outcome;
  std::vector<std::vector<double>> values;
  std::vector<std::string> presence;
};

// Widths of integers in records: 0, 1, then 1, 2, 3, 4, 6 and 8 bytes, at their edges.
constexpr std::array<std::int64_t, 14> kCompositions = {0,
                                                        1,
                                                        2,
                                                        127,
                                                        128,
                                                        32767,
                                                        32768,
                                                        8388607,
                                                        8388608,
                                                        2147483647,
                                                        2147483648,
                                                        140737488355327,
                                                        140737488355328,
                                                        9223372036854775807};

Content contentOf(const Shape& shape) {
  Content content;
  content.values.resize(shape.reals);
  content.presence.resize(shape.reals);
  for (std::size_t k = 0; k < shape.rows; ++k) {
    content.composition.push_back(kCompositions[k % kCompositions.size()]);
    content.phase.push_back(static_cast<char>(k % 5));
    content.outcome.push_back(static_cast<char>(k % 8));
  }
  for (std::size_t c = 0; c < shape.reals; ++c) {
    content.values[c].resize(shape.rows);
    if (c % 3 != 0) content.presence[c].assign((shape.rows + 7) / 8, '\0');
    for (std::size_t k = 0; k < shape.rows; ++k) {
      content.values[c][k] =
          (k % 2 == 0 ? 1 : -1) * (static_cast<double>(k) + 1.0 / static_cast<double>(c + 3));
      // Whole rows without values, too: column 0 alone has them all.
      if (c % 3 != 0 && k % 11 != 0 && (k + c) % 5 != 0)
        content.presence[c][k / 8] =
            static_cast<char>(static_cast<unsigned char>(content.presence[c][k / 8]) | 1U << (k % 8));
    }
  }
  return content;
}

bool isThere(const Content& content, std::size_t c, std::size_t k) {
  return content.presence[c].empty() ||
         (static_cast<unsigned char>(content.presence[c][k / 8]) >> (k % 8) & 1U) != 0;
}

std::string createTable(std::size_t reals) {
  std::string sql =
      "CREATE TABLE rows(point INTEGER PRIMARY KEY, composition INTEGER NOT NULL, phase INTEGER, outcome "
      "INTEGER NOT NULL";
  for (std::size_t c = 0; c < reals; ++c) sql += ",c" + std::to_string(c) + " REAL";
  return sql + ") STRICT";
}

/// Writes the image as a file, in two blocks where there is more than one row.
void writeImage(const std::filesystem::path& file, const Shape& shape, const Content& content) {
  RecordImage image;
  image.begin(createTable(shape.reals), shape.reals);
  const std::size_t half = shape.rows / 2 / 8 * 8;
  for (const auto& [first, count] : {std::pair(std::size_t{0}, half), std::pair(half, shape.rows - half)}) {
    std::vector<RealColumn> reals;
    for (std::size_t c = 0; c < shape.reals; ++c)
      reals.push_back({reinterpret_cast<const char*>(content.values[c].data() + first),
                       content.presence[c].empty() ? nullptr : content.presence[c].data() + first / 8});
    image.append({shape.first_point + first, std::span(content.composition).subspan(first, count),
                  std::span(content.phase).subspan(first, count),
                  std::span(content.outcome).subspan(first, count), reals});
  }
  const std::span<char> bytes = image.finish();
  EXPECT_LE(bytes.size(), RecordImage::mostBytes(shape.rows, shape.reals));
  std::ofstream(file, std::ios::binary).write(bytes.data(), static_cast<std::streamsize>(bytes.size()));
}

class Image : public testing::TestWithParam<Shape> {};

TEST_P(Image, IsADatabaseThatSqliteFindsWholeAndReadsBack) {
  const Shape shape = GetParam();
  const Content content = contentOf(shape);
  const Folder folder;
  const std::filesystem::path file = folder / "image.sqlite";
  writeImage(file, shape, content);

  Connection connection(file);
  EXPECT_EQ(ask(connection, "PRAGMA integrity_check"), "ok");
  EXPECT_EQ(connection.integer("SELECT count(*) FROM rows"), static_cast<std::int64_t>(shape.rows));
  Statement all(connection.handle(), "SELECT * FROM rows");
  std::size_t wrong = 0;
  for (std::size_t k = 0; k < shape.rows; ++k) {
    ASSERT_TRUE(all.row());
    wrong += all.integer(0) != static_cast<std::int64_t>(shape.first_point + k) ? 1 : 0;
    wrong += all.integer(1) != content.composition[k] ? 1 : 0;
    wrong += all.isNull(2) != (content.phase[k] == 0) || all.integer(2) != content.phase[k] ? 1 : 0;
    wrong += all.integer(3) != content.outcome[k] ? 1 : 0;
    for (std::size_t c = 0; c < shape.reals; ++c) {
      const int column = static_cast<int>(c) + 4;
      const bool there = isThere(content, c, k);
      wrong += all.isNull(column) == there ? 1 : 0;
      // To the bit: records are not text.
      wrong += there && std::bit_cast<std::uint64_t>(all.real(column)) !=
                            std::bit_cast<std::uint64_t>(content.values[c][k])
                   ? 1
                   : 0;
    }
  }
  EXPECT_EQ(wrong, 0U);
}

// One leaf; a leaf and its edge; two levels; three levels of pages (more than kPageSize / 14 leaves); record
// headers of one and of two bytes' length; records of 8 kB; rowids of one to eight bytes.
INSTANTIATE_TEST_SUITE_P(Shapes, Image,
                         testing::Values(Shape{1, 0, 0}, Shape{1, 1, 0}, Shape{17, 4, 100},
                                         Shape{4096, 32, 0}, Shape{4096, 122, 1'000'000},
                                         Shape{4096, 123, 1'000'000}, Shape{4096, 124, 1'000'000},
                                         Shape{3000, 300, 1ULL << 35}, Shape{500, 1000, (1ULL << 56) - 600},
                                         Shape{100'000, 32, 16'000}, Shape{7000, 1000, 0}),
                         [](const testing::TestParamInfo<Shape>& info) {
                           return std::to_string(info.param.rows) + "rows_" +
                                  std::to_string(info.param.reals) + "reals_from" +
                                  std::to_string(info.param.first_point);
                         });

}  // namespace
}  // namespace holdfast::coordinator
