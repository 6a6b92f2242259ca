// Typed access to the tables of a study, with places: what is wrong is put on the list of findings, and
// reading goes on.
#pragma once

#include <toml++/toml.h>

#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "coordinator/study/study.hpp"

namespace holdfast::coordinator {

/// A place in the study's text: line and column (in characters) count from 1; 0 means the file as a whole.
struct Place {
  int line = 0;
  int column = 0;
};

Place placeOf(const toml::source_region& region);

/// A value and where it stands.
template <class T>
struct Placed {
  T value;
  Place place;
};
using PlacedText = Placed<std::string>;

/// The keys of a table, or the words a key takes. They outlive what reads them.
using Words = std::span<const std::string_view>;

/// The mistakes found so far, and the text they were found in.
class Findings {
 public:
  explicit Findings(std::string_view text) : text_(text) {}

  void report(Place place, std::string message);
  std::size_t count() const { return diagnostics_.size(); }
  std::vector<Diagnostic> inFileOrder() &&;

  /// Where byte `offset` (of its value) stands of a string that begins at `string`: behind opening quotes,
  /// escapes and line ends.
  Place inside(Place string, std::size_t offset) const;

 private:
  std::string_view text_;
  std::vector<Diagnostic> diagnostics_;
};

/// One table of a study. Keys that it does not have are reported when it is made.
class Section {
 public:
  /// `title` is how messages call the table: "[[axis]]". Table and findings must outlive the section.
  Section(const toml::table& table, std::string title, Words keys, Place place, Findings& findings);

  bool has(std::string_view key) const { return table_.contains(key); }
  /// Of the table itself.
  Place place() const { return place_; }
  /// Of the value of a key, or of the table where the key is missing.
  Place placeOfValue(std::string_view key) const;
  void report(Place place, std::string message) const { findings_.report(place, std::move(message)); }

  // Each returns nullopt where the key is missing, and also where what stands there is wrong, after reporting
  // it.
  std::optional<PlacedText> text(std::string_view key) const;
  std::optional<Placed<std::int64_t>> integer(std::string_view key, std::int64_t least,
                                              std::int64_t most) const;
  /// A finite number, or text with a unit (units.hpp), in `si_unit`.
  std::optional<Placed<double>> quantity(std::string_view key, std::string_view si_unit) const;
  /// One of some words.
  std::optional<PlacedText> choice(std::string_view key, Words words) const;
  /// A list of texts: those that are texts.
  std::optional<std::vector<PlacedText>> texts(std::string_view key) const;
  /// A list of quantities: all of them, or nullopt.
  std::optional<std::vector<Placed<double>>> quantities(std::string_view key, std::string_view si_unit) const;
  /// The table of a key as a section.
  std::optional<Section> section(std::string_view key, std::string title, Words keys) const;
  /// The tables of an array of tables ([[key]]) as sections.
  std::vector<Section> sections(std::string_view key, Words keys) const;

 private:
  const toml::array* list(std::string_view key, std::string_view of_what) const;
  std::optional<Placed<double>> quantityOf(const toml::node& node, std::string_view si_unit) const;

  const toml::table& table_;
  std::string title_;
  Place place_;
  Findings& findings_;
};

}  // namespace holdfast::coordinator
