#include "coordinator/study/section.hpp"

#include <algorithm>
#include <cmath>

#include "coordinator/study/units.hpp"
#include "coordinator/study/wording.hpp"
#include "thermo/fluids/spelling.hpp"

namespace holdfast::coordinator {
namespace {

std::string_view kindOf(const toml::node& node) {
  switch (node.type()) {
    case toml::node_type::table:
      return "a table";
    case toml::node_type::array:
      return "a list";
    case toml::node_type::string:
      return "text";
    case toml::node_type::integer:
    case toml::node_type::floating_point:
      return "a number";
    case toml::node_type::boolean:
      return "true or false";
    default:
      return "a date or time";
  }
}

std::string wants(std::string_view key, std::string_view what, const toml::node& found) {
  return inQuotes(key) + " takes " + std::string(what) + ", not " + std::string(kindOf(found));
}

}  // namespace

Place placeOf(const toml::source_region& region) {
  return {static_cast<int>(region.begin.line), static_cast<int>(region.begin.column)};
}

Section::Section(const toml::table& table, std::string title, Words keys, Place place, Findings& findings)
    : table_(table), title_(std::move(title)), place_(place), findings_(findings) {
  for (const auto& [key, value] : table)
    if (std::find(keys.begin(), keys.end(), key.str()) == keys.end())
      findings.report(placeOf(key.source()), "unknown key " + inQuotes(key.str()) +
                                                 thermo::suggestion(key.str(), keys) + ": " + title_ +
                                                 " has " + listed(keys));
}

Place Section::placeOfValue(std::string_view key) const {
  const toml::node* const node = table_.get(key);
  return node != nullptr ? placeOf(node->source()) : place_;
}

std::optional<PlacedText> Section::text(std::string_view key) const {
  const toml::node* const node = table_.get(key);
  if (node == nullptr) return std::nullopt;
  const Place place = placeOf(node->source());
  if (const auto* const found = node->as_string()) return PlacedText{found->get(), place};
  findings_.report(place, wants(key, "text", *node));
  return std::nullopt;
}

std::optional<Placed<std::int64_t>> Section::integer(std::string_view key, std::int64_t least,
                                                     std::int64_t most) const {
  const toml::node* const node = table_.get(key);
  if (node == nullptr) return std::nullopt;
  const Place place = placeOf(node->source());
  const auto* const found = node->as_integer();
  if (found != nullptr && found->get() >= least && found->get() <= most)
    return Placed<std::int64_t>{found->get(), place};
  const std::string range =
      "a whole number from " + std::to_string(least) + " to " + grouped(static_cast<std::uint64_t>(most));
  if (found != nullptr)
    findings_.report(place, inQuotes(key) + " takes " + range + ", not " + std::to_string(found->get()));
  else
    findings_.report(
        place, node->is_floating_point() ? inQuotes(key) + " takes " + range : wants(key, range, *node));
  return std::nullopt;
}

std::optional<Placed<double>> Section::quantityOf(const toml::node& node, std::string_view si_unit) const {
  const Place place = placeOf(node.source());
  if (const auto* const text = node.as_string()) {
    const auto value = parseQuantity(text->get(), si_unit);
    if (value) return Placed<double>{*value, place};
    findings_.report(place, value.error().message);
    return std::nullopt;
  }
  if (node.is_number()) {
    const double number = *node.value<double>();
    if (std::isfinite(number)) return Placed<double>{number, place};
    findings_.report(place, "a quantity must be finite");
    return std::nullopt;
  }
  findings_.report(place, "expected a number (in " + std::string(si_unit) + ") or text with a unit, not " +
                              std::string(kindOf(node)));
  return std::nullopt;
}

std::optional<Placed<double>> Section::quantity(std::string_view key, std::string_view si_unit) const {
  const toml::node* const node = table_.get(key);
  return node != nullptr ? quantityOf(*node, si_unit) : std::nullopt;
}

std::optional<PlacedText> Section::choice(std::string_view key, Words words) const {
  auto found = text(key);
  if (!found || std::find(words.begin(), words.end(), found->value) != words.end()) return found;
  std::string message = "unknown " + std::string(key) + " " + inQuotes(found->value) + ": ";
  for (const std::string_view word : words) {
    if (word.data() != words.front().data()) message += " | ";
    message += inQuotes(word);
  }
  findings_.report(found->place, message);
  return std::nullopt;
}

const toml::array* Section::list(std::string_view key, std::string_view of_what) const {
  const toml::node* const node = table_.get(key);
  if (node == nullptr) return nullptr;
  if (const auto* const array = node->as_array()) return array;
  findings_.report(placeOf(node->source()), wants(key, of_what, *node));
  return nullptr;
}

std::optional<std::vector<PlacedText>> Section::texts(std::string_view key) const {
  const toml::array* const array = list(key, "a list of texts");
  if (array == nullptr) return std::nullopt;
  std::vector<PlacedText> found;
  for (const toml::node& node : *array) {
    const Place place = placeOf(node.source());
    if (const auto* const text = node.as_string())
      found.push_back({text->get(), place});
    else
      findings_.report(place, wants(key, "a list of texts", node));
  }
  return found;
}

std::optional<std::vector<Placed<double>>> Section::quantities(std::string_view key,
                                                               std::string_view si_unit) const {
  const toml::array* const array = list(key, "a list of numbers or of texts with units");
  if (array == nullptr) return std::nullopt;
  std::vector<Placed<double>> found;
  for (const toml::node& node : *array)
    if (const auto value = quantityOf(node, si_unit)) found.push_back(*value);
  if (found.size() != array->size()) return std::nullopt;
  return found;
}

std::optional<Section> Section::section(std::string_view key, std::string title, Words keys) const {
  const toml::node* const node = table_.get(key);
  if (node == nullptr) return std::nullopt;
  const Place place = placeOf(node->source());
  if (const auto* const table = node->as_table())
    return Section(*table, std::move(title), keys, place, findings_);
  findings_.report(place, wants(key, "a table, " + title, *node));
  return std::nullopt;
}

std::vector<Section> Section::sections(std::string_view key, Words keys) const {
  std::vector<Section> found;
  const std::string title = "[[" + std::string(key) + "]]";
  const toml::node* const node = table_.get(key);
  if (node == nullptr) return found;
  const toml::array* const array = node->as_array();
  if (array == nullptr) {
    findings_.report(placeOf(node->source()), inQuotes(key) + " is written with two brackets: " + title);
    return found;
  }
  if (array->empty()) findings_.report(placeOf(node->source()), inQuotes(key) + " is an empty list");
  for (const toml::node& element : *array) {
    const Place place = placeOf(element.source());
    if (const auto* const table = element.as_table())
      found.emplace_back(*table, title, keys, place, findings_);
    else
      findings_.report(place, wants(key, "tables, " + title, element));
  }
  return found;
}

}  // namespace holdfast::coordinator
