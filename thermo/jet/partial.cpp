#include "thermo/jet/partial.hpp"

#include <algorithm>
#include <cctype>

namespace holdfast::thermo {

namespace {

constexpr std::string_view kPartialTakes = "a partial takes T p v rho u h s a g";
constexpr std::string_view kDel = "\xE2\x88\x82";  // ∂

/// Reads one column text from left to right. A fault is thrown as GrammarError and never leaves this file.
class Parser {
 public:
  explicit Parser(std::string_view text) : text_(text) {}

  ColumnExpression column() {
    skipBlanks();
    if (at_ == text_.size())
      fail("empty: a quantity such as rho, or a partial such as (dh/dp)_T, is expected");
    ColumnExpression out = peek('(') ? partial() : quantity();
    skipBlanks();
    if (at_ != text_.size()) fail("nothing may follow here");
    return out;
  }

 private:
  /// A base quantity with the marks of a side.
  struct Marked {
    Base base;
    Side side;
    std::size_t at;
    std::string text;
  };

  [[noreturn]] void fail(std::size_t offset, const std::string& message) const {
    throw GrammarError{offset, message};
  }
  [[noreturn]] void fail(const std::string& message) const { fail(at_, message); }

  void skipBlanks() {
    while (at_ < text_.size() && std::isspace(static_cast<unsigned char>(text_[at_])) != 0) ++at_;
  }
  bool peek(char sign) {
    skipBlanks();
    return at_ < text_.size() && text_[at_] == sign;
  }
  void expect(char sign, const std::string& where) {
    if (!peek(sign)) fail(std::string("\"") + sign + "\" is expected " + where);
    ++at_;
  }
  std::string word() {
    skipBlanks();
    const std::size_t from = at_;
    while (at_ < text_.size() &&
           (std::isalnum(static_cast<unsigned char>(text_[at_])) != 0 || text_[at_] == '_'))
      ++at_;
    return std::string(text_.substr(from, at_ - from));
  }

  ColumnExpression quantity() {
    const std::size_t from = at_;
    const std::string symbol = word();
    const auto found = quantityOf(symbol);
    if (!found)
      fail(from,
           symbol.empty() ? "a quantity or a partial is expected" : "unknown quantity \"" + symbol + "\"");
    const bool of_component = *found == Quantity::x || *found == Quantity::y || *found == Quantity::z;
    QuantityColumn out{*found, ""};
    if (peek('[')) {
      if (!of_component) fail("\"" + symbol + "\" does not belong to a component");
      const std::size_t open = at_++;
      const std::size_t close = text_.find(']', at_);
      if (close == std::string_view::npos) fail(open, "\"]\" is missing");
      std::string_view inside = text_.substr(at_, close - at_);
      while (!inside.empty() && inside.front() == ' ') inside.remove_prefix(1);
      while (!inside.empty() && inside.back() == ' ') inside.remove_suffix(1);
      if (inside.empty()) fail("a component is expected, as in x[R-32]");
      out.component = inside;
      at_ = close + 1;
    } else if (of_component) {
      fail("\"" + symbol + "\" needs a component, as in " + symbol + "[R-32]");
    }
    const std::string text = out.component.empty() ? symbol : symbol + "[" + out.component + "]";
    return {out, text};
  }

  /// "d" or "∂".
  void differential() {
    skipBlanks();
    if (text_.substr(at_).starts_with(kDel))
      at_ += kDel.size();
    else if (peek('d'))
      ++at_;
    else
      fail("\"d\" is expected");
    if (peek('(')) fail("second partials are not available yet");
  }

  Marked base() {
    skipBlanks();
    Marked out{Base::T, Side::both, at_, ""};
    const std::string symbol = word();
    const auto found = quantityOf(symbol);
    if (!found || static_cast<int>(*found) >= kBases)
      fail(out.at,
           (symbol.empty() ? std::string("a quantity is expected") : "\"" + symbol + "\" cannot stand here") +
               "; " + std::string(kPartialTakes));
    out.base = static_cast<Base>(*found);
    out.text = symbol;
    if (peek('\'')) {
      ++at_;
      out.side = Side::liquid;
      out.text += "'";
      if (at_ < text_.size() && text_[at_] == '\'') {
        ++at_;
        out.side = Side::vapour;
        out.text += "'";
      }
    }
    return out;
  }

  ColumnExpression partial() {
    expect('(', "here");
    differential();
    const Marked of = base();
    expect('/', "between the two differentials");
    differential();
    const Marked by = base();
    expect(')', "after the two differentials");
    skipBlanks();
    if (!peek('_')) fail("say what is held fast: _ and a quantity, as in (dh/dp)_T, or _sat");
    ++at_;
    skipBlanks();
    if (text_.substr(at_).starts_with("sat") &&
        (at_ + 3 == text_.size() || std::isalnum(static_cast<unsigned char>(text_[at_ + 3])) == 0)) {
      at_ += 3;
      return alongSaturation(of, by);
    }
    const Marked held = base();
    for (const Marked* each : {&of, &by, &held})
      if (each->side != Side::both) fail(each->at, "' and '' belong to the saturation line: _sat");
    if (of.base == by.base) fail(by.at, "a quantity is differentiated by itself");
    if (by.base == held.base) fail(held.at, "\"" + held.text + "\" is varied and held fast at once");
    if (of.base == held.base) fail(held.at, "\"" + held.text + "\" is held fast and differentiated at once");
    return {Partial{of.base, by.base, held.base}, "(d" + of.text + "/d" + by.text + ")_" + held.text};
  }

  ColumnExpression alongSaturation(const Marked& of, const Marked& by) const {
    if (by.base != Base::T && by.base != Base::p) fail(by.at, "along saturation the variable is T or p");
    if (by.side != Side::both) fail(by.at, "T and p are the same on both sides: without a mark");
    const bool common = of.base == Base::T || of.base == Base::p;
    if (common && of.side != Side::both) fail(of.at, "T and p are the same on both sides: without a mark");
    if (!common && of.side == Side::both)
      fail(of.at, "say which side: " + of.text + "' of the liquid or " + of.text + "'' of the vapour");
    if (of.base == by.base) fail(by.at, "a quantity is differentiated by itself");
    return {SaturationPartial{of.base, of.side, by.base}, "(d" + of.text + "/d" + by.text + ")_sat"};
  }

  std::string_view text_;
  std::size_t at_ = 0;
};

/// Exponents of the units that columns are made of, in the order m kg s K mol: every unit here is a product
/// of them.
struct Dimension {
  int metre = 0, kilogram = 0, second = 0, kelvin = 0, mole = 0;
  friend Dimension operator-(Dimension a, const Dimension& b) {
    return {a.metre - b.metre, a.kilogram - b.kilogram, a.second - b.second, a.kelvin - b.kelvin,
            a.mole - b.mole};
  }
};

Dimension dimensionOf(Base base, Basis basis) {
  const int per_kg = basis == Basis::mass ? 1 : 0;
  const int per_mol = 1 - per_kg;
  switch (base) {
    case Base::T:
      return {0, 0, 0, 1, 0};
    case Base::p:
      return {-1, 1, -2, 0, 0};
    case Base::v:
      return {3, -per_kg, 0, 0, -per_mol};
    case Base::rho:
      return {-3, per_kg, 0, 0, per_mol};
    case Base::s:
      return {2, 1 - per_kg, -2, -1, -per_mol};
    case Base::u:
    case Base::h:
    case Base::a:
    case Base::g:
      return {2, 1 - per_kg, -2, 0, -per_mol};
  }
  return {};
}

std::string textOfDimension(const Dimension& dimension) {
  std::string out;
  const auto add = [&out](std::string_view unit, int exponent) {
    if (exponent == 0) return;
    if (!out.empty()) out += ' ';
    out += unit;
    if (exponent != 1) out += std::to_string(exponent);
  };
  add("kg", dimension.kilogram);
  add("mol", dimension.mole);
  add("m", dimension.metre);
  add("s", dimension.second);
  add("K", dimension.kelvin);
  return out.empty() ? "1" : out;
}

std::string lower(std::string text) {
  for (char& sign : text) sign = static_cast<char>(std::tolower(static_cast<unsigned char>(sign)));
  return text;
}

/// Long form of a name that clashes with another when letter case is ignored; the same name where there is
/// none.
std::string longForm(const ColumnExpression& column) {
  const auto* quantity = std::get_if<QuantityColumn>(&column.what);
  if (quantity == nullptr) return columnName(column);
  switch (quantity->quantity) {
    case Quantity::Z:
      return "compressibility";
    case Quantity::z:
      return "overall_" + columnName(column).substr(2);
    default:
      return columnName(column);
  }
}

}  // namespace

std::variant<ColumnExpression, GrammarError> parseColumn(std::string_view text) {
  try {
    return Parser(text).column();
  } catch (const GrammarError& fault) {
    return fault;
  }
}

std::string columnName(const ColumnExpression& column) {
  std::string text;
  for (std::size_t i = 0; i < column.written_as.size(); ++i) {
    const std::string_view rest = std::string_view(column.written_as).substr(i);
    if (rest.starts_with("''")) {
      text += "_vap_";
      ++i;
    } else if (rest.starts_with("'")) {
      text += "_liq_";
    } else if (rest.starts_with(")_")) {
      text += "_at_";
      ++i;
    } else {
      text += rest.front();
    }
  }
  // Every other sign becomes one '_': runs of them too, none at the ends.
  std::string out;
  for (const char sign : text) {
    if (std::isalnum(static_cast<unsigned char>(sign)) != 0)
      out += sign;
    else if (!out.empty() && out.back() != '_')
      out += '_';
  }
  while (!out.empty() && out.back() == '_') out.pop_back();
  return out;
}

Result<std::vector<std::string>> columnNames(const std::vector<ColumnExpression>& columns) {
  std::vector<std::string> names;
  for (const auto& column : columns) {
    // Compressibility always has its long form: z[..] and Z cannot be told apart by SQLite, and a study may
    // gain one later.
    const auto* quantity = std::get_if<QuantityColumn>(&column.what);
    const bool compressibility = quantity != nullptr && quantity->quantity == Quantity::Z;
    names.push_back(compressibility ? longForm(column) : columnName(column));
  }
  for (std::size_t i = 0; i < names.size(); ++i)
    for (std::size_t j = 0; j < i; ++j) {
      if (lower(names[i]) != lower(names[j])) continue;
      names[i] = longForm(columns[i]);
      names[j] = longForm(columns[j]);
      if (lower(names[i]) == lower(names[j])) {
        if (columns[i].written_as == columns[j].written_as)
          return Error{"\"" + columns[i].written_as + "\" stands twice"};
        return Error{"\"" + columns[j].written_as + "\" and \"" + columns[i].written_as +
                     "\" would both be called " + names[i] + " in the store, which ignores letter case"};
      }
    }
  return names;
}

std::string unitOf(const ColumnExpression& column, Basis basis) {
  if (const auto* quantity = std::get_if<QuantityColumn>(&column.what)) {
    const QuantityText& text = textOf(quantity->quantity);
    return std::string(basis == Basis::mass ? text.unit_mass : text.unit_molar);
  }
  if (const auto* partial = std::get_if<Partial>(&column.what))
    return textOfDimension(dimensionOf(partial->of, basis) - dimensionOf(partial->by, basis));
  const auto& partial = std::get<SaturationPartial>(column.what);
  return textOfDimension(dimensionOf(partial.of, basis) - dimensionOf(partial.by, basis));
}

std::string meaningOf(const ColumnExpression& column) {
  const auto name = [](Base base) { return std::string(textOf(static_cast<Quantity>(base)).meaning); };
  if (const auto* quantity = std::get_if<QuantityColumn>(&column.what)) {
    const std::string meaning(textOf(quantity->quantity).meaning);
    return quantity->component.empty() ? meaning : meaning + " of " + quantity->component;
  }
  if (const auto* partial = std::get_if<Partial>(&column.what))
    return "change of " + name(partial->of) + " with " + name(partial->by) + " at constant " +
           name(partial->held);
  const auto& partial = std::get<SaturationPartial>(column.what);
  const std::string side = partial.side == Side::liquid   ? " of the saturated liquid"
                           : partial.side == Side::vapour ? " of the saturated vapour"
                                                          : "";
  return "change of " + name(partial.of) + side + " with " + name(partial.by) + " along the saturation line";
}

}  // namespace holdfast::thermo
