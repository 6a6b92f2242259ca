#include "coordinator/study/collect.hpp"

#include <algorithm>
#include <map>
#include <utility>
#include <variant>

#include "coordinator/study/wording.hpp"
#include "thermo/jet/partial.hpp"

namespace holdfast::coordinator {
namespace {

struct Column {
  thermo::ColumnExpression expression;
  Place place;
};

class ColumnReader {
 public:
  ColumnReader(const Axes& axes, const std::vector<std::string>& components,
               const thermo::FluidLibrary& library, Findings& findings)
      : axes_(axes), components_(components), library_(library), findings_(findings) {}

  enum class Kind { quantity, partial };

  void add(const PlacedText& written, Kind kind) {
    auto parsed = thermo::parseColumn(written.value);
    if (const auto* const error = std::get_if<thermo::GrammarError>(&parsed)) {
      findings_.report(findings_.inside(written.place, error->offset), error->message);
      return;
    }
    auto& expression = std::get<thermo::ColumnExpression>(parsed);
    const auto* const quantity = std::get_if<thermo::QuantityColumn>(&expression.what);
    if ((quantity != nullptr) != (kind == Kind::quantity)) {
      findings_.report(written.place, inQuotes(written.value) +
                                          (quantity != nullptr
                                               ? " is a quantity: it belongs in quantities = [...]"
                                               : " is a partial derivative: it belongs in partials = [...]"));
      return;
    }
    if (quantity != nullptr && !quantity->component.empty() && !resolveComponent(expression, written)) return;
    const auto [first, is_new] = place_of_.emplace(expression.written_as, written.place);
    if (!is_new) {
      findings_.report(written.place, inQuotes(written.value) + " is collected already (line " +
                                          std::to_string(first->second.line) + ")");
      return;
    }
    if (axes_.sweeps(expression.written_as)) {
      findings_.report(written.place,
                       inQuotes(expression.written_as) + " is an axis: it stands in every row anyway");
      return;
    }
    columns_.push_back({std::move(expression), written.place});
    reportClash();
  }

  std::vector<std::string> canonicalTexts() const {
    std::vector<std::string> texts;
    for (const Column& column : columns_) texts.push_back(column.expression.written_as);
    return texts;
  }

 private:
  /// Writes the component of x[..], y[..] or z[..] as the candidates call it.
  bool resolveComponent(thermo::ColumnExpression& expression, const PlacedText& written) {
    const std::string& name = std::get<thermo::QuantityColumn>(expression.what).component;
    const Place place = findings_.inside(written.place, written.value.find('[') + 1);
    const auto fluid = library_.find(name);
    if (!fluid) {
      findings_.report(place, fluid.error().message);
      return false;
    }
    const std::string& label = (*fluid)->label();
    if (!components_.empty() &&
        std::find(components_.begin(), components_.end(), label) == components_.end()) {
      findings_.report(place, "no candidate has the component " + inQuotes(label));
      return false;
    }
    const std::string canonical = written.value.substr(0, written.value.find('[')) + '[' + label + ']';
    if (auto again = thermo::parseColumn(canonical); std::holds_alternative<thermo::ColumnExpression>(again))
      expression = std::get<thermo::ColumnExpression>(std::move(again));
    return true;
  }

  /// Takes the last column out again if its name in the store is taken. The axes have columns there too.
  void reportClash() {
    std::vector<thermo::ColumnExpression> expressions;
    for (const v1::PlannedAxis& axis : axes_.planned)
      if (auto parsed = thermo::parseColumn(axis.quantity());
          std::holds_alternative<thermo::ColumnExpression>(parsed))
        expressions.push_back(std::get<thermo::ColumnExpression>(std::move(parsed)));
    for (const Column& column : columns_) expressions.push_back(column.expression);
    const auto names = thermo::columnNames(expressions);
    if (names) return;
    findings_.report(columns_.back().place, names.error().message);
    columns_.pop_back();
  }

  const Axes& axes_;
  const std::vector<std::string>& components_;
  const thermo::FluidLibrary& library_;
  Findings& findings_;
  std::vector<Column> columns_;
  std::map<std::string, Place> place_of_;
};

}  // namespace

std::vector<std::string> readColumns(const Section& collect, const Axes& axes,
                                     const std::vector<std::string>& components,
                                     const thermo::FluidLibrary& library, Findings& findings) {
  const auto quantities = collect.texts("quantities").value_or(std::vector<PlacedText>());
  const auto partials = collect.texts("partials").value_or(std::vector<PlacedText>());
  if (quantities.size() + partials.size() > kMostColumns) {
    findings.report(collect.place(), "a study collects at most " + std::to_string(kMostColumns) +
                                         " columns, not " +
                                         std::to_string(quantities.size() + partials.size()));
    return {};
  }
  ColumnReader reader(axes, components, library, findings);
  for (const PlacedText& text : quantities) reader.add(text, ColumnReader::Kind::quantity);
  for (const PlacedText& text : partials) reader.add(text, ColumnReader::Kind::partial);
  if (quantities.empty() && partials.empty() && !collect.has("quantities") && !collect.has("partials"))
    findings.report(collect.place(), "[collect] has neither quantities nor partials");
  return reader.canonicalTexts();
}

}  // namespace holdfast::coordinator
