#include "coordinator/study/wording.hpp"

#include <cstdint>

namespace holdfast::coordinator {
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

std::string grouped(std::uint64_t number) {
  std::string digits = std::to_string(number);
  for (std::size_t left = digits.size(); left > 3;) digits.insert(left -= 3, 1, ' ');
  return digits;
}

}  // namespace holdfast::coordinator
