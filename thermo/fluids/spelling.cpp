#include "thermo/fluids/spelling.hpp"

#include <algorithm>
#include <cctype>
#include <numeric>
#include <vector>

namespace holdfast::thermo {

std::string folded(std::string_view name) {
  std::string out;
  for (const char c : name)
    if (std::isspace(static_cast<unsigned char>(c)) == 0)
      out += static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
  return out;
}

namespace {

std::size_t distance(const std::string& from, const std::string& to) {
  std::vector<std::size_t> row(to.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= from.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= to.size(); ++j) {
      const std::size_t replaced = diagonal + (from[i - 1] == to[j - 1] ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({row[j] + 1, row[j - 1] + 1, replaced});
    }
  }
  return row.back();
}

}  // namespace

std::string suggestion(std::string_view word, std::span<const std::string_view> choices) {
  constexpr std::size_t kLongest = 64;  // nothing that can be chosen is longer
  if (word.empty() || word.size() > kLongest) return {};
  const std::string given = folded(word);
  std::size_t allowed = std::max<std::size_t>(1, given.size() / 3);
  std::string_view best;
  for (const std::string_view choice : choices) {
    const std::size_t away = distance(given, folded(choice));
    if (away > allowed || (away == allowed && !best.empty())) continue;
    allowed = away;
    best = choice;
  }
  return best.empty() ? std::string() : " (did you mean \"" + std::string(best) + "\"?)";
}

}  // namespace holdfast::thermo
