// Spelling of names: how they are compared, and "did you mean".
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace holdfast::thermo {

/// Lower case without blanks: two spellings of one name fold to the same text.
std::string folded(std::string_view name);

/// ` (did you mean "near"?)` with the choice nearest to `word` in spelling (fewest insertions, deletions and
/// replacements, letter case ignored: Levenshtein, Soviet Physics Doklady 10 (1966) 707); empty if none is
/// near.
std::string suggestion(std::string_view word, std::span<const std::string_view> choices);

}  // namespace holdfast::thermo
