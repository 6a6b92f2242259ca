// The list of mistakes and the way from a string's value back to its place in the text.
#include <algorithm>
#include <charconv>
#include <tuple>

#include "coordinator/study/section.hpp"

namespace holdfast::coordinator {
namespace {

bool continuesCharacter(char byte) {
  return (static_cast<unsigned char>(byte) & 0xC0U) == 0x80U;
}

/// Bytes of a code point in UTF-8.
std::size_t bytesOf(std::uint32_t code_point) {
  if (code_point < 0x80) return 1;
  if (code_point < 0x800) return 2;
  return code_point < 0x10000 ? 3 : 4;
}

/// Walks through the text, counting lines and columns as the TOML reader does: columns in characters.
class Walk {
 public:
  Walk(std::string_view text, Place start) : text_(text), place_{start.line, 1} {
    for (int line = 1; line < start.line; ++line) at_ = std::min(text.find('\n', at_), text.size() - 1) + 1;
    if (start.line == 1 && text.starts_with("\xEF\xBB\xBF")) at_ = 3;  // a byte order mark has no column
    while (place_.column < start.column && at_ < text_.size()) step();
  }

  std::string_view rest() const { return text_.substr(at_); }
  Place place() const { return place_; }

  /// Over one character.
  void step() {
    if (at_ >= text_.size()) return;
    if (text_[at_++] == '\n')
      place_ = {place_.line + 1, 1};
    else {
      while (at_ < text_.size() && continuesCharacter(text_[at_])) ++at_;
      ++place_.column;
    }
  }
  void step(std::size_t characters) {
    while (characters-- > 0) step();
  }

 private:
  std::string_view text_;
  std::size_t at_ = 0;
  Place place_;
};

/// Over one item of a basic string (a character or an escape); returns the bytes it adds to the value.
std::size_t stepItem(Walk& walk, bool escapes) {
  const std::string_view rest = walk.rest();
  if (!escapes || rest.front() != '\\' || rest.size() < 2) {
    std::size_t bytes = 1;
    while (bytes < rest.size() && continuesCharacter(rest[bytes])) ++bytes;
    walk.step();
    return bytes;
  }
  if (rest[1] == 'u' || rest[1] == 'U') {
    const std::size_t digits = rest[1] == 'u' ? 4 : 8;
    std::uint32_t code_point = 0;
    const std::string_view written = rest.substr(2, digits);
    std::from_chars(written.data(), written.data() + written.size(), code_point, 16);
    walk.step(2 + digits);
    return bytesOf(code_point);
  }
  if (std::string_view(" \t\r\n").find(rest[1]) != std::string_view::npos) {  // the line goes on
    walk.step();
    while (!walk.rest().empty() &&
           std::string_view(" \t\r\n").find(walk.rest().front()) != std::string_view::npos)
      walk.step();
    return 0;
  }
  walk.step(2);
  return 1;
}

}  // namespace

Place Findings::inside(Place string, std::size_t offset) const {
  Walk walk(text_, string);
  const std::string_view rest = walk.rest();
  if (rest.empty()) return string;
  const bool escapes = rest.front() == '"';
  const bool several_lines = rest.starts_with("\"\"\"") || rest.starts_with("'''");
  walk.step(several_lines ? 3 : 1);
  if (several_lines && walk.rest().starts_with('\r')) walk.step();
  if (several_lines && walk.rest().starts_with('\n'))
    walk.step();  // a first line end is no part of the value
  for (std::size_t value_bytes = 0; value_bytes < offset && !walk.rest().empty();)
    value_bytes += stepItem(walk, escapes);
  return walk.place();
}

void Findings::report(Place place, std::string message) {
  diagnostics_.push_back({place.line, place.column, std::move(message)});
}

std::vector<Diagnostic> Findings::inFileOrder() && {
  std::stable_sort(diagnostics_.begin(), diagnostics_.end(), [](const Diagnostic& a, const Diagnostic& b) {
    return std::tie(a.line, a.column) < std::tie(b.line, b.column);
  });
  return std::move(diagnostics_);
}

}  // namespace holdfast::coordinator
