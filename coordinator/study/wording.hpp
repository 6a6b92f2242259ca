// How messages about a study are worded: quotes, lists, large numbers. Suggestions:
// thermo/fluids/spelling.hpp.
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

/// 1234567 -> "1 234 567"
std::string grouped(std::uint64_t number);

}  // namespace holdfast::coordinator
