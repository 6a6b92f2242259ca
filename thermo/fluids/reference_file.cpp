#include "thermo/fluids/reference_file.hpp"

#include <toml++/toml.h>
#include <cmath>
#include <set>

namespace holdfast::thermo {

namespace {

/// Reads one file; the first fault stays and ends the reading (exceptions never leave this file).
class Reader {
 public:
  explicit Reader(std::string_view file) : file_(file) {}

  [[noreturn]] void fail(const toml::node& node, const std::string& field, const std::string& what) const {
    throw Error{file_ + ":" + std::to_string(node.source().begin.line) + ": field \"" + field +
                "\": " + what};
  }

  double number(const toml::node& node, const std::string& field) const {
    const auto value = node.value<double>();
    if (!value) fail(node, field, "a number is expected");
    if (!std::isfinite(*value)) fail(node, field, "the number is not finite");
    return *value;
  }
  const toml::node& need(const toml::table& table, const std::string& field) const {
    const toml::node* node = table.get(field);
    if (node == nullptr) fail(table, field, "is missing");
    return *node;
  }
  double number(const toml::table& table, const std::string& field) const {
    return number(need(table, field), field);
  }
  double positive(const toml::table& table, const std::string& field) const {
    const double value = number(table, field);
    if (!(value > 0)) fail(need(table, field), field, "must be positive");
    return value;
  }
  std::optional<double> optional(const toml::table& table, const std::string& field) const {
    const toml::node* node = table.get(field);
    if (node == nullptr) return std::nullopt;
    return number(*node, field);
  }
  std::string text(const toml::table& table, const std::string& field) const {
    const toml::node& node = need(table, field);
    const auto value = node.value<std::string>();
    if (!value) fail(node, field, "a text is expected");
    return *value;
  }
  const toml::table& table(const toml::table& parent, const std::string& field) const {
    const toml::node& node = need(parent, field);
    if (node.as_table() == nullptr) fail(node, field, "a table is expected");
    return *node.as_table();
  }
  void only(const toml::table& table, const std::set<std::string>& known) const {
    for (const auto& [key, node] : table)
      if (!known.contains(std::string(key.str()))) fail(node, std::string(key.str()), "is not known");
  }

  /// Rows of exactly N numbers; none if the field is not there.
  template <std::size_t N>
  std::vector<std::array<double, N>> rows(const toml::table& parent, const std::string& field) const {
    std::vector<std::array<double, N>> out;
    const toml::node* node = parent.get(field);
    if (node == nullptr) return out;
    if (node->as_array() == nullptr) fail(*node, field, "an array of rows is expected");
    for (const toml::node& row : *node->as_array()) {
      const toml::array* numbers = row.as_array();
      if (numbers == nullptr || numbers->size() != N)
        fail(row, field, "a row of " + std::to_string(N) + " numbers is expected");
      std::array<double, N> values;
      for (std::size_t i = 0; i < N; ++i) values[i] = number(*numbers->get(i), field);
      out.push_back(values);
    }
    return out;
  }

 private:
  std::string file_;
};

template <class Term, std::size_t N, std::size_t... I>
Term termOf(const std::array<double, N>& row, std::index_sequence<I...>) {
  return Term{row[I]...};
}
template <class Term, std::size_t N>
std::vector<Term> terms(const std::vector<std::array<double, N>>& rows) {
  std::vector<Term> out;
  out.reserve(rows.size());
  for (const auto& row : rows) out.push_back(termOf<Term>(row, std::make_index_sequence<N>()));
  return out;
}

void readEquation(const Reader& read, const toml::table& table, ReferenceEquationData& out) {
  using D = ReferenceEquationData;
  read.only(table, {"source", "R", "scale", "plain", "damped", "double_damped", "bell", "inverse_bell",
                    "nonanalytic"});
  out.source = read.text(table, "source");
  out.R = read.positive(table, "R");
  const toml::table& scale = read.table(table, "scale");
  read.only(scale, {"T", "rho"});
  out.scale_T = read.positive(scale, "T");
  out.scale_rho = read.positive(scale, "rho");
  out.plain = terms<D::Plain>(read.rows<3>(table, "plain"));
  out.damped = terms<D::Damped>(read.rows<4>(table, "damped"));
  out.double_damped = terms<D::DoubleDamped>(read.rows<5>(table, "double_damped"));
  out.bell = terms<D::Bell>(read.rows<7>(table, "bell"));
  out.inverse_bell = terms<D::InverseBell>(read.rows<8>(table, "inverse_bell"));
  out.nonanalytic = terms<D::Nonanalytic>(read.rows<8>(table, "nonanalytic"));
  // The kernel has room for 96 powers of tau and of delta: one or two a term, and those they are multiplied
  // from.
  constexpr std::size_t kMostTerms = 80;
  const std::size_t count = out.plain.size() + out.damped.size() + 2 * out.double_damped.size() +
                            out.bell.size() + out.inverse_bell.size() + out.nonanalytic.size();
  if (count == 0) read.fail(table, "helmholtz", "an equation has terms");
  if (count > kMostTerms) read.fail(table, "helmholtz", "more than " + std::to_string(kMostTerms) + " terms");
}

void readIdeal(const Reader& read, const toml::table& table, ReferenceFluid& out) {
  read.only(table, {"source", "c0", "power", "einstein"});
  out.ideal_source = read.text(table, "source");
  out.ideal.c0 = read.number(table, "c0");
  out.ideal.power = terms<IdealHeatCapacity::Power>(read.rows<2>(table, "power"));
  out.ideal.einstein = terms<IdealHeatCapacity::Einstein>(read.rows<2>(table, "einstein"));
}

CheckState readCheck(const Reader& read, const toml::table& table) {
  read.only(table, {"source", "T", "rho", "p", "cv", "cp", "w", "h", "s"});
  CheckState check;
  check.source = read.text(table, "source");
  check.T = read.positive(table, "T");
  check.rho = read.positive(table, "rho");
  check.p = read.optional(table, "p");
  check.cv = read.optional(table, "cv");
  check.cp = read.optional(table, "cp");
  check.w = read.optional(table, "w");
  check.h = read.optional(table, "h");
  check.s = read.optional(table, "s");
  return check;
}

ReferenceFluid readFluid(const Reader& read, const toml::table& root) {
  read.only(root, {"designation", "name", "formula", "cas", "M", "validity", "critical", "triple",
                   "normal_boiling", "helmholtz", "ideal", "check"});
  ReferenceFluid fluid;
  if (root.contains("designation")) fluid.designation = read.text(root, "designation");
  fluid.name = read.text(root, "name");
  fluid.formula = read.text(root, "formula");
  fluid.cas = read.text(root, "cas");
  fluid.M = read.positive(root, "M");

  const toml::table& validity = read.table(root, "validity");
  read.only(validity, {"temperature", "pressure_up_to"});
  const toml::array* range = read.need(validity, "temperature").as_array();
  if (range == nullptr || range->size() != 2)
    read.fail(read.need(validity, "temperature"), "temperature", "two numbers are expected");
  fluid.T_from = read.number(*range->get(0), "temperature");
  fluid.T_up_to = read.number(*range->get(1), "temperature");
  if (!(fluid.T_from > 0 && fluid.T_from < fluid.T_up_to))
    read.fail(*range, "temperature", "must be positive and ascend");
  fluid.p_up_to = read.positive(validity, "pressure_up_to");

  const toml::table& critical = read.table(root, "critical");
  read.only(critical, {"T", "p", "rho"});
  fluid.T_critical = read.positive(critical, "T");
  fluid.p_critical = read.positive(critical, "p");
  fluid.rho_critical = read.positive(critical, "rho");
  if (root.contains("triple")) {
    const toml::table& triple = read.table(root, "triple");
    read.only(triple, {"T", "p"});
    fluid.T_triple = read.positive(triple, "T");
    fluid.p_triple = read.optional(triple, "p");
  }
  if (root.contains("normal_boiling")) {
    const toml::table& boiling = read.table(root, "normal_boiling");
    read.only(boiling, {"T"});
    fluid.T_boil = read.positive(boiling, "T");
  }
  readEquation(read, read.table(root, "helmholtz"), fluid.equation);
  readIdeal(read, read.table(root, "ideal"), fluid);
  if (root.contains("check")) {
    const toml::node& node = read.need(root, "check");
    if (node.as_array() == nullptr) read.fail(node, "check", "an array of tables is expected");
    for (const toml::node& check : *node.as_array()) {
      if (check.as_table() == nullptr) read.fail(check, "check", "a table is expected");
      fluid.checks.push_back(readCheck(read, *check.as_table()));
    }
  }
  return fluid;
}

}  // namespace

Result<ReferenceFluid> parseReferenceFluid(std::string_view file, std::string_view text) {
  try {
    const toml::table root = toml::parse(text, file);
    ReferenceFluid fluid = readFluid(Reader(file), root);
    const std::size_t slash = file.find_last_of('/');
    const std::string_view name = slash == std::string_view::npos ? file : file.substr(slash + 1);
    fluid.file = name.substr(0, name.rfind('.'));
    return fluid;
  } catch (const toml::parse_error& fault) {
    return Error{std::string(file) + ":" + std::to_string(fault.source().begin.line) + ": " +
                 std::string(fault.description())};
  } catch (const Error& fault) {
    return fault;
  }
}

}  // namespace holdfast::thermo
