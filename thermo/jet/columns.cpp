#include "thermo/jet/columns.hpp"

#include <cassert>
#include <cmath>
#include <utility>

namespace holdfast::thermo {

namespace {

/// Which bases are functions of one variable of the surface: two of the same class depend on each other.
int classOf(Base base, Surface surface) {
  switch (base) {
    case Base::v:
    case Base::rho:
      return 0;
    case Base::T:
      return 1;
    case Base::p:
    case Base::g:
      return surface == Surface::pure_two_phase ? 1 : 2 + static_cast<int>(base);
    default:
      return 2 + static_cast<int>(base);
  }
}
bool dependent(Base x, Base z, Surface surface) {
  return classOf(x, surface) == classOf(z, surface);
}

/// Power of the molar mass that turns the molar value of a base into the one per mass: value * M^power.
int massPower(Base base) {
  switch (base) {
    case Base::T:
    case Base::p:
      return 0;
    case Base::rho:
      return 1;
    default:
      return -1;
  }
}

double scaleOf(int power, double M, Basis basis) {
  if (basis == Basis::molar || power == 0) return 1;
  return power > 0 ? M : 1 / M;
}

bool isSpecific(Quantity quantity) {
  return quantity == Quantity::cv || quantity == Quantity::cp;
}

}  // namespace

std::string_view sentenceOf(Absence absence) {
  switch (absence) {
    case Absence::none:
      return "";
    case Absence::dependent_variables:
      return "its variables depend on each other in such a state: there is no such derivative";
    case Absence::needs_saturated_state:
      return "defined on the saturation line and between its two sides only: give the state by beta";
    case Absence::phase_not_there:
      return "the state has no such phase";
    case Absence::no_such_component:
      return "the candidate has no such component";
    case Absence::singular:
      return "singular at the state: its denominator vanishes (critical point, limit of stability)";
  }
  return "";
}

Columns::Columns(std::vector<ColumnExpression> expressions, Basis basis,
                 std::vector<std::string> designations)
    : basis_(basis) {
  for (ColumnExpression& expression : expressions) {
    Column column;
    column.what = std::move(expression.what);
    if (const auto* quantity = std::get_if<QuantityColumn>(&column.what); quantity != nullptr)
      for (std::size_t i = 0; i < designations.size(); ++i)
        if (designations[i] == quantity->component) column.component = static_cast<int>(i);
    columns_.push_back(std::move(column));
  }
}

int Columns::count() const {
  return static_cast<int>(columns_.size());
}

Absence Columns::absence(int column, Surface surface, Saturated saturated, Phase phase) const {
  const auto& what = columns_[static_cast<std::size_t>(column)].what;
  if (const auto* partial = std::get_if<Partial>(&what))
    return dependent(partial->by, partial->held, surface) ? Absence::dependent_variables : Absence::none;
  if (std::holds_alternative<SaturationPartial>(what))
    return saturated == Saturated::yes ? Absence::none : Absence::needs_saturated_state;
  const Quantity quantity = std::get<QuantityColumn>(what).quantity;
  const bool two_phase = surface == Surface::pure_two_phase;
  switch (quantity) {
    case Quantity::cp:
    case Quantity::alpha_v:
    case Quantity::kappa_T:
      return two_phase ? Absence::dependent_variables : Absence::none;
    case Quantity::beta:
      return two_phase || saturated == Saturated::yes ? Absence::none : Absence::needs_saturated_state;
    case Quantity::x:
    case Quantity::y: {
      if (columns_[static_cast<std::size_t>(column)].component < 0) return Absence::no_such_component;
      const Phase own = quantity == Quantity::x ? Phase::liquid : Phase::vapour;
      return two_phase || phase == own ? Absence::none : Absence::phase_not_there;
    }
    default:
      return Absence::none;
  }
}

namespace {

/// One call's view of the source: Jacobians along (ln T, ln rho).
class Reader {
 public:
  explicit Reader(const ColumnSource& source) : source_(source), on_(*source.overall) {}

  double jacobian(Base x, Base z, int k) const {
    const Gradient& X = on_[x];
    const Gradient& Z = on_[z];
    return X.by_lnT[k] * Z.by_lnrho[k] - X.by_lnrho[k] * Z.by_lnT[k];
  }

  /// (dx/dy)_z in molar units into `out`. The caller has seen that it exists. Where x and z depend on each
  /// other their gradients are parallel: the numerator is zero without rounding.
  void partial(Base x, Base y, Base z, double scale, Row& out) const {
    const Gradient& X = on_[x];
    const Gradient& Y = on_[y];
    const Gradient& Z = on_[z];
    for (int k = 0; k < source_.count; ++k) {
      const double above = X.by_lnT[k] * Z.by_lnrho[k] - X.by_lnrho[k] * Z.by_lnT[k];
      const double below = Y.by_lnT[k] * Z.by_lnrho[k] - Y.by_lnrho[k] * Z.by_lnT[k];
      out[k] = scale * above / below;
    }
  }

  /// Clapeyron: dp/dT along saturation.
  double slope(int k) const {
    const GradientTile& l = *source_.liquid;
    const GradientTile& v = *source_.vapour;
    return (v[Base::s].value[k] - l[Base::s].value[k]) / (v[Base::v].value[k] - l[Base::v].value[k]);
  }

  void alongSaturation(const SaturationPartial& partial, double scale, Row& out) const {
    assert(source_.liquid != nullptr && source_.vapour != nullptr);  // absence() lets no other state in
    const GradientTile& side = partial.side == Side::liquid ? *source_.liquid : *source_.vapour;
    for (int k = 0; k < source_.count; ++k) {
      const double P = slope(k);
      if (partial.side == Side::both) {
        out[k] = partial.of == Base::p ? P : 1 / P;
        continue;
      }
      const double T = side[Base::T].value[k];
      const Gradient& p = side[Base::p];
      const Gradient& X = side[partial.of];
      const double density = (T * P - p.by_lnT[k]) / p.by_lnrho[k];  // d ln rho/d ln T along the line
      const double by_T = (X.by_lnT[k] + X.by_lnrho[k] * density) / T;
      out[k] = scale * (partial.by == Base::T ? by_T : by_T / P);
    }
  }

  void quantity(Quantity quantity, int component, double scale, Row& out) const;

 private:
  const ColumnSource& source_;
  const GradientTile& on_;
};

void Reader::quantity(Quantity quantity, int component, double scale, Row& out) const {
  const auto each = [&](const auto& value) {
    for (int k = 0; k < source_.count; ++k) out[k] = value(k);
  };
  const Gradient& T = on_[Base::T];
  const Gradient& p = on_[Base::p];
  const Gradient& v = on_[Base::v];
  const Gradient& s = on_[Base::s];
  switch (quantity) {
    case Quantity::cv:
      each([&](int k) { return scale * s.by_lnT[k]; });
      break;
    case Quantity::cp:
      partial(Base::h, Base::T, Base::p, scale, out);
      break;
    case Quantity::w:
      // w^2 = (dp/drho)_s / M
      each([&](int k) {
        return std::sqrt(jacobian(Base::p, Base::s, k) / (jacobian(Base::rho, Base::s, k) * on_.M));
      });
      break;
    case Quantity::Z:
      each([&](int k) { return p.value[k] * v.value[k] / (on_.R * T.value[k]); });
      break;
    case Quantity::beta:
      each([&](int k) { return (*source_.beta)[k]; });
      break;
    case Quantity::mu_JT:
      partial(Base::T, Base::p, Base::h, 1, out);
      break;
    case Quantity::alpha_v:
      each([&](int k) {
        return p.by_lnT[k] / (T.value[k] * p.by_lnrho[k]);
      });  // (dv/dT)_p/v = p_lnT/(T p_lnrho)
      break;
    case Quantity::kappa_T:
      each([&](int k) { return 1 / p.by_lnrho[k]; });
      break;
    case Quantity::kappa_s:
      each([&](int k) {
        return jacobian(Base::rho, Base::s, k) / (on_[Base::rho].value[k] * jacobian(Base::p, Base::s, k));
      });
      break;
    case Quantity::M:
      each([&](int) { return on_.M; });
      break;
    case Quantity::x:
    case Quantity::y:
    case Quantity::z:
      each([&](int) { return component < 0 ? 0.0 : source_.z[component]; });
      break;
    default: {
      const Gradient& base = on_[static_cast<Base>(quantity)];
      each([&](int k) { return scale * base.value[k]; });
    }
  }
}

}  // namespace

void Columns::evaluate(const ColumnSource& source, Out& out) const {
  out.value.resize(columns_.size());
  out.reason.resize(columns_.size());
  const Reader reader(source);
  const double M = source.overall->M;
  const Saturated saturated = source.liquid != nullptr ? Saturated::yes : Saturated::no;
  for (std::size_t c = 0; c < columns_.size(); ++c) {
    const Column& column = columns_[c];
    const Absence absent = absence(static_cast<int>(c), source.overall->surface, saturated, source.phase);
    out.reason[c].fill(absent);
    Row& value = out.value[c];
    if (absent != Absence::none) continue;
    if (const auto* partial = std::get_if<Partial>(&column.what)) {
      const double scale =
          scaleOf(massPower(partial->of), M, basis_) / scaleOf(massPower(partial->by), M, basis_);
      reader.partial(partial->of, partial->by, partial->held, scale, value);
    } else if (const auto* along = std::get_if<SaturationPartial>(&column.what)) {
      const double scale =
          scaleOf(massPower(along->of), M, basis_) / scaleOf(massPower(along->by), M, basis_);
      reader.alongSaturation(*along, scale, value);
    } else {
      const Quantity quantity = std::get<QuantityColumn>(column.what).quantity;
      int power = isSpecific(quantity) ? -1 : 0;
      if (static_cast<int>(quantity) < kBases) power = massPower(static_cast<Base>(quantity));
      reader.quantity(quantity, column.component, scaleOf(power, M, basis_), value);
    }
    for (int k = 0; k < source.count; ++k)
      if (!std::isfinite(value[k])) out.reason[c][static_cast<std::size_t>(k)] = Absence::singular;
  }
}

}  // namespace holdfast::thermo
