// How messages about a study are worded: quotes, suggestions, lists.
#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <string_view>

namespace holdfast::coordinator {

/// The text in quotes, safe to print: control characters as "?", long texts cut with "...".
std::string inQuotes(std::string_view text);

/// `a, b and c`
std::string listed(std::span<const std::string_view> words);

/// ` (did you mean "near"?)` with the choice nearest to `word` in spelling; empty if none is near.
std::string suggestion(std::string_view word, std::span<const std::string_view> choices);

/// 1234567 -> "1 234 567"
std::string grouped(std::uint64_t number);

}  // namespace holdfast::coordinator
