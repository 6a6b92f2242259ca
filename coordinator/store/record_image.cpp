#include "coordinator/store/record_image.hpp"

#include <algorithm>
#include <array>
#include <bit>
#include <cassert>
#include <cstring>
#include <string>

namespace holdfast::coordinator {
namespace {

constexpr std::size_t kFileHeader = 100;
constexpr std::size_t kLeafHeader = 8, kInteriorHeader = 12;
constexpr char kTableLeaf = 0x0d, kTableInterior = 0x05;

// Serial types of a record ("Record Format").
constexpr char kNull = 0, kOneByte = 1, kDouble = 7, kZero = 8, kOne = 9;

/// Big-endian, `width` bytes.
char* put(char* at, std::uint64_t value, int width) {
  for (int i = width - 1; i >= 0; --i) *at++ = static_cast<char>(value >> (8 * i));
  return at;
}

/// A variable-length integer: 7 bits a byte, most significant first ("Varint"). Here always below 2^56: eight
/// bytes at most. (A ninth would carry eight bits.)
int varintLength(std::uint64_t value) {
  assert(value < std::uint64_t{1} << 56);
  return value == 0 ? 1 : (std::bit_width(value) + 6) / 7;
}

char* putVarint(char* at, std::uint64_t value) {
  for (int i = varintLength(value) - 1; i >= 0; --i)
    *at++ = static_cast<char>(((value >> (7 * i)) & 0x7Fu) | (i > 0 ? 0x80u : 0u));
  return at;
}

/// Serial type and body width of a non-negative integer.
struct IntegerForm {
  char type;
  int width;
};

IntegerForm formOf(std::int64_t value) {
  if (value == 0) return {kZero, 0};
  if (value == 1) return {kOne, 0};
  constexpr std::array<IntegerForm, 6> kForms = {{{1, 1}, {2, 2}, {3, 3}, {4, 4}, {5, 6}, {6, 8}}};
  for (const IntegerForm& form : kForms)
    if (form.width == 8 || value < std::int64_t{1} << (8 * form.width - 1)) return form;
  return kForms.back();
}

bool isPresent(const char* presence, std::size_t row) {
  return presence == nullptr || (static_cast<unsigned char>(presence[row / 8]) >> (row % 8) & 1U) != 0;
}

char* putDouble(char* at, const char* little_endian) {
  std::uint64_t bits = 0;
  std::memcpy(&bits, little_endian, sizeof bits);
  if constexpr (std::endian::native == std::endian::little) bits = __builtin_bswap64(bits);
  std::memcpy(at, &bits, sizeof bits);
  return at + sizeof bits;
}

/// Bytes of a record's header with `types` one-byte serial types: the size counts itself.
std::size_t headerBytes(std::size_t types) {
  return types + (types + 1 < 128 ? 1 : 2);
}

/// The four columns before the REAL ones.
constexpr std::size_t kLeadingColumns = 4;
/// Their bodies at most: composition 8, phase 1, outcome 1.
constexpr std::size_t kLeadingBody = 10;
/// Payload length and rowid before a record, and the pointer to its cell.
constexpr std::size_t kCellOverhead = 3 + 8 + 2;

}  // namespace

std::size_t RecordImage::mostBytes(std::size_t rows, std::size_t reals) {
  const std::size_t row =
      kCellOverhead + headerBytes(kLeadingColumns + reals) + kLeadingBody + reals * sizeof(double);
  const std::size_t rows_of_page = (kPageSize - kLeafHeader) / row;
  const std::size_t leaves = rows / rows_of_page + 1;
  // Interior pages hold more than a hundred children each: a fiftieth covers all levels.
  return (1 + leaves + leaves / 50 + 2) * kPageSize;
}

void RecordImage::begin(std::string_view create_table, std::size_t reals) {
  assert(create_table.size() <= kPageSize / 2 && reals <= kMostReals);
  create_table_.assign(create_table.begin(), create_table.end());
  reals_ = reals;
  leaves_.clear();
  pages_ = 1;
  cells_ = 0;
  if (bytes_.size() < kPageSize) bytes_.resize(kPageSize);
}

std::uint32_t RecordImage::newPage() {
  ++pages_;
  if (bytes_.size() < std::size_t{pages_} * kPageSize) bytes_.resize(2 * std::size_t{pages_} * kPageSize);
  return pages_;
}

/// Room for a cell on the open leaf, or on a new one: cells grow from the page's end, pointers to them from
/// its start ("B-tree Pages").
char* RecordImage::newCell(std::size_t size) {
  if (cells_ > 0 && kLeafHeader + 2 * (cells_ + 1) + size > content_start_) closeLeaf();
  if (cells_ == 0) {
    newPage();
    content_start_ = kPageSize;
  }
  content_start_ -= size;
  put(page(pages_) + kLeafHeader + 2 * cells_, content_start_, 2);
  ++cells_;
  return page(pages_) + content_start_;
}

void RecordImage::closeLeaf() {
  char* const start = page(pages_);
  char* at = start;
  *at++ = kTableLeaf;
  at = put(at, 0, 2);  // no freeblock
  at = put(at, cells_, 2);
  at = put(at, content_start_, 2);
  *at = 0;  // no fragmented bytes
  const std::size_t used = kLeafHeader + 2 * cells_;
  std::memset(start + used, 0, content_start_ - used);
  leaves_.push_back({pages_, last_point_});
  cells_ = 0;
}

void RecordImage::append(const ImageRows& rows) {
  assert(rows.reals.size() == reals_);
  const std::size_t count = rows.composition.size();
  present_.assign(count, static_cast<std::uint16_t>(reals_));
  for (const RealColumn& column : rows.reals)
    if (column.presence != nullptr)
      for (std::size_t k = 0; k < count; ++k)
        present_[k] = static_cast<std::uint16_t>(present_[k] - (isPresent(column.presence, k) ? 0 : 1));

  const std::size_t header = headerBytes(kLeadingColumns + reals_);
  for (std::size_t k = 0; k < count; ++k) {
    const std::uint64_t point = rows.first_point + k;
    const std::int64_t composition = rows.composition[k];
    const IntegerForm composition_form = formOf(composition);
    const char phase = rows.phase[k];
    const IntegerForm outcome_form = formOf(rows.outcome[k]);
    const std::size_t body = static_cast<std::size_t>(composition_form.width) + (phase == 0 ? 0 : 1) +
                             static_cast<std::size_t>(outcome_form.width) + present_[k] * sizeof(double);
    const std::size_t payload = header + body;
    char* at = newCell(static_cast<std::size_t>(varintLength(payload) + varintLength(point)) + payload);
    at = putVarint(at, payload);
    at = putVarint(at, point);
    at = putVarint(at, header);
    *at++ = kNull;  // the rowid stands for an INTEGER PRIMARY KEY
    *at++ = composition_form.type;
    *at++ = phase == 0 ? kNull : kOneByte;
    *at++ = outcome_form.type;
    char* types = at;
    at = put(at + reals_, static_cast<std::uint64_t>(composition), composition_form.width);
    if (phase != 0) *at++ = phase;
    at = put(at, static_cast<std::uint64_t>(rows.outcome[k]), outcome_form.width);
    if (present_[k] == reals_) {
      std::memset(types, kDouble, reals_);
      for (const RealColumn& column : rows.reals) at = putDouble(at, column.values + k * sizeof(double));
    } else {
      for (const RealColumn& column : rows.reals) {
        const bool present = isPresent(column.presence, k);
        *types++ = present ? kDouble : kNull;
        if (present) at = putDouble(at, column.values + k * sizeof(double));
      }
    }
    last_point_ = point;
  }
}

/// One level of interior pages above `children`: in each, all children but the last stand in cells with
/// their largest rowid, the last in the page header ("right-most pointer").
std::vector<RecordImage::Child> RecordImage::interiorLevel(std::span<const Child> children) {
  constexpr std::size_t kMostCell = 4 + 8, kMostChildren = (kPageSize - kInteriorHeader) / (kMostCell + 2);
  std::vector<Child> parents;
  while (!children.empty()) {
    std::size_t taken = std::min(children.size(), kMostChildren);
    if (children.size() - taken == 1) --taken;  // no page with a single child
    const std::uint32_t number = newPage();
    char* const start = page(number);
    std::memset(start, 0, kPageSize);
    std::size_t content_start = kPageSize;
    for (std::size_t i = 0; i + 1 < taken; ++i) {
      content_start -= 4 + static_cast<std::size_t>(varintLength(children[i].last_point));
      putVarint(put(start + content_start, children[i].page, 4), children[i].last_point);
      put(start + kInteriorHeader + 2 * i, content_start, 2);
    }
    start[0] = kTableInterior;
    put(start + 3, taken - 1, 2);
    put(start + 5, content_start, 2);
    put(start + 8, children[taken - 1].page, 4);
    parents.push_back({number, children[taken - 1].last_point});
    children = children.subspan(taken);
  }
  return parents;
}

void RecordImage::writeFirstPage(std::uint32_t root) {
  char* const start = page(1);
  std::memset(start, 0, kPageSize);
  // "The Database Header"
  std::memcpy(start, "SQLite format 3", 16);
  put(start + 16, kPageSize, 2);
  start[18] = start[19] = 1;                   // written and read with a rollback journal
  start[21] = 64, start[22] = start[23] = 32;  // payload fractions, fixed by the format
  put(start + 24, 1, 4);                       // change counter
  put(start + 28, pages_, 4);
  put(start + 40, 1, 4);  // schema cookie
  put(start + 44, 4, 4);  // schema format
  put(start + 56, 1, 4);  // UTF-8
  put(start + 92, 1, 4);  // the change counter that the page count belongs to
  put(start + 96, 3'040'001, 4);

  // The schema's only row: type, name, tbl_name, rootpage, sql.
  constexpr std::string_view kType = "table", kName = "rows";
  const auto textType = [](std::size_t length) { return 13 + 2 * length; };
  const std::size_t header = 5 + static_cast<std::size_t>(varintLength(textType(create_table_.size())));
  const std::size_t payload = header + kType.size() + 2 * kName.size() + 4 + create_table_.size();
  const std::size_t content_start = kPageSize - static_cast<std::size_t>(varintLength(payload)) - 1 - payload;
  char* at = putVarint(start + content_start, payload);
  at = putVarint(at, 1);  // rowid
  at = putVarint(at, header);
  at = putVarint(at, textType(kType.size()));
  at = putVarint(at, textType(kName.size()));
  at = putVarint(at, textType(kName.size()));
  at = putVarint(at, 4);  // rootpage in four bytes
  at = putVarint(at, textType(create_table_.size()));
  at = std::ranges::copy(kType, at).out;
  at = std::ranges::copy(kName, at).out;
  at = std::ranges::copy(kName, at).out;
  at = put(at, root, 4);
  std::ranges::copy(create_table_, at);

  char* const leaf = start + kFileHeader;
  leaf[0] = kTableLeaf;
  put(leaf + 3, 1, 2);
  put(leaf + 5, content_start, 2);
  put(leaf + kLeafHeader, content_start, 2);
}

std::span<char> RecordImage::finish() {
  if (cells_ > 0) closeLeaf();
  assert(!leaves_.empty());
  std::vector<Child> level = leaves_;
  while (level.size() > 1) level = interiorLevel(level);
  writeFirstPage(level.front().page);
  return {bytes_.data(), std::size_t{pages_} * kPageSize};
}

}  // namespace holdfast::coordinator
