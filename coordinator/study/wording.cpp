#include "coordinator/study/wording.hpp"

#include <algorithm>
#include <cctype>
#include <cstdint>
#include <numeric>
#include <vector>

namespace holdfast::coordinator {
namespace {

char lower(char sign) {
  return static_cast<char>(std::tolower(static_cast<unsigned char>(sign)));
}

/// Fewest insertions, deletions and replacements from one spelling to the other, letter case ignored
/// (Levenshtein, Soviet Physics Doklady 10 (1966) 707).
std::size_t distance(std::string_view from, std::string_view to) {
  std::vector<std::size_t> row(to.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= from.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= to.size(); ++j) {
      const std::size_t replaced = diagonal + (lower(from[i - 1]) == lower(to[j - 1]) ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({row[j] + 1, row[j - 1] + 1, replaced});
    }
  }
  return row.back();
}

}  // namespace

std::string inQuotes(std::string_view text) {
  constexpr std::size_t kShown = 80;  // bytes
  std::string shown;
  for (std::size_t i = 0; i < text.size(); ++i) {
    // Cut only between characters: a continuation byte of UTF-8 stays with what it continues.
    if (i >= kShown && (static_cast<unsigned char>(text[i]) & 0xC0U) != 0x80U) {
      shown += "...";
      break;
    }
    const auto sign = static_cast<unsigned char>(text[i]);
    shown += sign < ' ' || sign == 0x7F ? '?' : text[i];
  }
  return '"' + shown + '"';
}

std::string listed(std::span<const std::string_view> words) {
  std::string list;
  for (std::size_t i = 0; i < words.size(); ++i) {
    if (i > 0) list += i + 1 == words.size() ? " and " : ", ";
    list += words[i];
  }
  return list;
}

std::string suggestion(std::string_view word, std::span<const std::string_view> choices) {
  constexpr std::size_t kLongest = 64;  // nothing that can be chosen is longer
  if (word.size() > kLongest) return {};
  std::string_view nearest;
  // Near: a third of the letters differ, and not all of them.
  std::size_t least = word.empty() ? 0 : std::min((word.size() + 2) / 3, word.size() - 1) + 1;
  for (const std::string_view choice : choices)
    if (const std::size_t d = distance(word, choice); d < least) {
      least = d;
      nearest = choice;
    }
  return nearest.empty() ? std::string() : " (did you mean " + inQuotes(nearest) + "?)";
}

std::string grouped(std::uint64_t number) {
  std::string digits = std::to_string(number);
  for (std::size_t left = digits.size(); left > 3;) digits.insert(left -= 3, 1, ' ');
  return digits;
}

}  // namespace holdfast::coordinator
