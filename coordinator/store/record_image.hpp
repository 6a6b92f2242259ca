// A SQLite database image of the rows of jobs, written page by page in the published file format
// ("Database File Format", sqlite.org/fileformat2.html; sections are named where they are used). Attached in
// memory, its records are copied into the store undecoded.
//
//   page 1       file header and the schema: one table, `rows`
//   pages 2..    the table's leaves in row order, then its interior pages, level by level, the root last
#pragma once

#include <cstdint>
#include <span>
#include <string_view>
#include <vector>

namespace holdfast::coordinator {

/// A REAL column of a block of rows.
struct RealColumn {
  const char* values = nullptr;    ///< packed little-endian doubles, one a row
  const char* presence = nullptr;  ///< bit k%8 of byte k/8: row k has a value, else NULL. Null: all have
};

/// Consecutive points on their way into the image.
struct ImageRows {
  std::uint64_t first_point = 0;              ///< all points below 2^56
  std::span<const std::int64_t> composition;  ///< one a row
  std::span<const char> phase;                ///< one a row, 0 becomes NULL
  std::span<const char> outcome;              ///< one a row
  std::span<const RealColumn> reals;          ///< in the order of the table's columns
};

class RecordImage {
 public:
  static constexpr std::size_t kPageSize = 32768;
  /// The page that would hold the file format's lock byte must stay unused; an image ends before it.
  static constexpr std::size_t kMostBytes = std::size_t{1} << 30;
  /// Rows of so many REAL columns always fit on a page: no record ever overflows into others.
  static constexpr std::size_t kMostReals = 1000;

  /// Begins anew; keeps its memory. `create_table`: the text of CREATE TABLE rows(point INTEGER PRIMARY KEY,
  /// composition, phase, outcome, then `reals` REAL columns), short enough for page 1 (kPageSize / 2 bytes).
  void begin(std::string_view create_table, std::size_t reals);

  /// Points must ascend from block to block.
  void append(const ImageRows& rows);

  /// The whole image, valid until the next begin(). At least one row must have been appended.
  std::span<char> finish();

  /// No image of so many rows is larger.
  static std::size_t mostBytes(std::size_t rows, std::size_t reals);

 private:
  struct Child {
    std::uint32_t page = 0;
    std::uint64_t last_point = 0;
  };
  char* page(std::uint32_t number) { return bytes_.data() + (number - 1) * kPageSize; }
  std::uint32_t newPage();
  char* newCell(std::size_t size);
  void closeLeaf();
  std::vector<Child> interiorLevel(std::span<const Child> children);
  void writeFirstPage(std::uint32_t root);

  std::vector<char> bytes_;
  std::vector<char> create_table_;
  std::vector<std::uint16_t> present_;  ///< of the rows of a block: how many REAL columns have a value
  std::vector<Child> leaves_;
  std::size_t reals_ = 0;
  std::uint32_t pages_ = 0;
  std::size_t cells_ = 0;          ///< on the open leaf; 0: none is open
  std::size_t content_start_ = 0;  ///< of the open leaf
  std::uint64_t last_point_ = 0;
};

}  // namespace holdfast::coordinator
