#include "thermo/equilibrium/saturation.hpp"

#include <algorithm>
#include <cmath>
#include <optional>
#include <sstream>
#include <vector>

namespace holdfast::thermo {
namespace {

// Unknowns x = ln rho' and y = ln rho''. With P = p/(R T) = rho (1 + r10), q = 1 + r10 + r20:
//
//   F = P' - P'' = 0                                 dF = rho' q' dx - rho'' q'' dy
//   G = (x + r00' + r10') - (y + r00'' + r10'') = 0  dG = q' dx - q'' dy
//
// Solved for the products a = q' dx and b = q'' dy, neither of which grows large where q vanishes. The same
// elimination with the derivatives by ln tau = -ln T in place of F and G gives the slopes along the line.

/// One Newton step of a lane and the slopes at where it was.
struct Step {
  double dx, dy;            ///< at constant T
  double dP;                ///< change of P'' that goes with it
  double P;                 ///< P'' before
  double Z;                 ///< P''/rho''
  double x_slope, y_slope;  ///< along the line, by ln tau
  double log_p_slope;       ///< d ln p/d ln tau along the line
};

Step newtonStep(double x, double y, const ResidualTile& liquid, const ResidualTile& vapour, int k) {
  const double rho1 = std::exp(x);
  const double rho2 = std::exp(y);
  const double Z1 = 1 + liquid[r10][k];
  const double Z2 = 1 + vapour[r10][k];
  const double q1 = Z1 + liquid[r20][k];
  const double q2 = Z2 + vapour[r20][k];
  const double F = rho1 * Z1 - rho2 * Z2;
  const double G = (x - y) + (liquid[r00][k] - vapour[r00][k]) + (liquid[r10][k] - vapour[r10][k]);
  const double F_t = rho1 * liquid[r11][k] - rho2 * vapour[r11][k];
  const double G_t = (liquid[r01][k] - vapour[r01][k]) + (liquid[r11][k] - vapour[r11][k]);
  const double gap = rho1 - rho2;
  const double a = (rho2 * G - F) / gap;
  const double b = (rho1 * G - F) / gap;
  const double a_t = (rho2 * G_t - F_t) / gap;
  const double b_t = (rho1 * G_t - F_t) / gap;
  return {a / q1, b / q2, rho2 * b, rho2 * Z2, Z2, a_t / q1, b_t / q2, (b_t + vapour[r11][k]) / Z2 - 1};
}

/// A step is the last one if what it leaves, its square, is below rounding. Near the critical point the scale
/// on which the equations bend is the distance of the two densities.
constexpr double kLastStep = 1e-7;
constexpr int kMostSteps = 40;
constexpr double kPressureRounding = 1e-12;

/// No step may bring the two densities to each other or run away.
double damping(double x, double y, double dx, double dy) {
  const double gap = x - y;
  const double most =
      std::max(std::abs(dx) / std::min(0.1, 0.25 * gap), std::abs(dy) / std::min(2.0, 0.25 * gap));
  return most > 1 ? 1 / most : 1;
}

struct Node {
  double s;               ///< sqrt(1 - T/T_c)
  double x, y, log_p;     ///< ln rho', ln rho'', ln p
  double dx, dy, dlog_p;  ///< by s
};

constexpr int kNodes = 121;
constexpr double kHighest = 0.99995;  ///< of T_c
constexpr double kStart = 0.9;        ///< of T_c: the loop of the isotherm is wide and its pressures moderate

struct Lanes {
  int count = 0;
  std::array<int, kTile> lane;
  Row T, x, y, rho_liquid, rho_vapour;
};

const Composition kPure{1.0};

Error untraced(const ModelComponent& fluid, double T) {
  std::ostringstream text;
  text << fluid.designation << ": the saturation line could not be traced at " << T << " K (critical "
       << fluid.critical.T << " K)";
  return Error{text.str()};
}

}  // namespace

struct SaturationCurve::Traced {
  std::shared_ptr<const Model> model;
  double T_critical = 0;
  double R = 0;
  double T_low = 0, T_high = 0;
  double p_low = 0, p_high = 0;
  std::vector<Node> nodes;  ///< even in s, ascending: falling T

  double variable(double T) const { return std::sqrt(std::max(0.0, 1 - T / T_critical)); }

  struct Point {
    double x, y, log_p;
  };
  /// Cubic Hermite interpolation with exact slopes.
  Point at(double s) const {
    const double h = nodes[1].s - nodes[0].s;
    const int i = std::clamp(static_cast<int>((s - nodes[0].s) / h), 0, kNodes - 2);
    const Node& l = nodes[static_cast<std::size_t>(i)];
    const Node& r = nodes[static_cast<std::size_t>(i) + 1];
    const double u = (s - l.s) / h;
    const double left = (1 + 2 * u) * (1 - u) * (1 - u);
    const double right = u * u * (3 - 2 * u);
    const double left_slope = h * u * (1 - u) * (1 - u);
    const double right_slope = -h * u * u * (1 - u);
    return {left * l.x + right * r.x + left_slope * l.dx + right_slope * r.dx,
            left * l.y + right * r.y + left_slope * l.dy + right_slope * r.dy,
            left * l.log_p + right * r.log_p + left_slope * l.dlog_p + right_slope * r.dlog_p};
  }

  double variableAt(double log_p) const;

  /// What is solved for: at given T the pressure follows, at given p the temperature too.
  enum class Given { T, p };
  void solve(Given given, Lanes& lanes, const Row& p, SaturationTile& out) const;

  std::optional<Point> firstGuess(double T) const;
  /// The node at T by Newton's method from a guess; its s is given.
  std::optional<Node> node(double s, double T, Point guess) const;
};

/// Newton's method lane by lane; `lanes` holds starts, packed anew when lanes are done, so that only lanes
/// still at work are evaluated.
void SaturationCurve::Traced::solve(Given given, Lanes& lanes, const Row& p, SaturationTile& out) const {
  ResidualTile liquid;
  ResidualTile vapour;
  for (int iteration = 0; iteration < kMostSteps && lanes.count > 0; ++iteration) {
    for (int k = 0; k < lanes.count; ++k) {
      lanes.rho_liquid[k] = std::exp(lanes.x[k]);
      lanes.rho_vapour[k] = std::exp(lanes.y[k]);
    }
    model->residual(Order::second, lanes.count, lanes.T, lanes.rho_liquid, kPure, liquid);
    model->residual(Order::second, lanes.count, lanes.T, lanes.rho_vapour, kPure, vapour);
    int left = 0;
    for (int k = 0; k < lanes.count; ++k) {
      const int lane = lanes.lane[static_cast<std::size_t>(k)];
      double T = lanes.T[k];
      double x = lanes.x[k];
      double y = lanes.y[k];
      const Step step = newtonStep(x, y, liquid, vapour, k);
      double dx = step.dx;
      double dy = step.dy;
      double dlogT = 0;
      double pressure = (step.P + step.dP) * R * T;
      if (given == Given::p) {
        pressure = p[lane];
        const double off = std::log(step.P * R * T / p[lane]);
        const double t = -(off + step.dP / step.P) / step.log_p_slope;
        dx += t * step.x_slope;
        dy += t * step.y_slope;
        dlogT = -t;
      }
      if (!std::isfinite(dx) || !std::isfinite(dy) || !std::isfinite(dlogT) || !(x > y)) continue;
      double part = damping(x, y, dx, dy);
      if (std::abs(dlogT) > 0.02) part = std::min(part, 0.02 / std::abs(dlogT));
      x += part * dx;
      y += part * dy;
      T *= 1 + part * dlogT;
      const double scale = kLastStep * std::min(1.0, x - y);
      if (part == 1 && std::abs(dx) <= scale && std::abs(dy) <= scale && std::abs(dlogT) <= kLastStep) {
        out.T[lane] = T;
        out.p[lane] = pressure;
        out.rho_liquid[lane] = std::exp(x);
        out.rho_vapour[lane] = std::exp(y);
        out.converged[static_cast<std::size_t>(lane)] = true;
        continue;
      }
      lanes.lane[static_cast<std::size_t>(left)] = lane;
      lanes.T[left] = T;
      lanes.x[left] = x;
      lanes.y[left] = y;
      ++left;
    }
    lanes.count = left;
  }
}

/// From the loop of an isotherm: the pressure halfway between its extremes and the densities there.
std::optional<SaturationCurve::Traced::Point> SaturationCurve::Traced::firstGuess(double T) const {
  const double rho_c = model->component(0).critical.rho;
  Row temperature;
  Row density;
  Row P;
  temperature.lane.fill(T);
  for (int k = 0; k < kTile; ++k) density[k] = rho_c * 0.04 * (k + 1);
  ResidualTile jet;
  model->residual(Order::second, kTile, temperature, density, kPure, jet);
  int vapour = -1;
  int liquid = -1;
  for (int k = 0; k < kTile; ++k) {
    P[k] = density[k] * (1 + jet[r10][k]);
    const bool unstable = 1 + jet[r10][k] + jet[r20][k] < 0;
    if (unstable && density[k] < rho_c && vapour < 0) vapour = k;
    if (unstable && density[k] < 2 * rho_c) liquid = k;
  }
  if (vapour < 1 || liquid < 0 || liquid + 1 >= kTile) return std::nullopt;
  const double aim = 0.5 * (std::max(0.0, P[liquid + 1]) + P[vapour - 1]);
  int k = vapour - 1;
  while (k > 0 && P[k - 1] > aim) --k;
  int l = liquid + 1;
  while (l + 1 < kTile && P[l] < aim) ++l;
  return Point{std::log(density[l]), std::log(density[k]), std::log(aim * R * T)};
}

std::optional<Node> SaturationCurve::Traced::node(double s, double T, Point guess) const {
  Lanes lanes;
  lanes.count = 1;
  lanes.lane[0] = 0;
  lanes.T[0] = T;
  lanes.x[0] = guess.x;
  lanes.y[0] = guess.y;
  SaturationTile solved;
  solved.converged.fill(false);
  solve(Given::T, lanes, lanes.T, solved);
  if (!solved.converged[0]) return std::nullopt;
  ResidualTile liquid;
  ResidualTile vapour;
  model->residual(Order::second, 1, solved.T, solved.rho_liquid, kPure, liquid);
  model->residual(Order::second, 1, solved.T, solved.rho_vapour, kPure, vapour);
  const double x = std::log(solved.rho_liquid[0]);
  const double y = std::log(solved.rho_vapour[0]);
  const Step step = newtonStep(x, y, liquid, vapour, 0);
  const double by_s = 2 * s * T_critical / T;  // d ln tau/ds
  return Node{
      s, x, y, std::log(solved.p[0]), step.x_slope * by_s, step.y_slope * by_s, step.log_p_slope * by_s};
}

double SaturationCurve::Traced::variableAt(double log_p) const {
  // Pressures fall along the nodes.
  const auto after = std::partition_point(nodes.begin(), nodes.end(),
                                          [log_p](const Node& node) { return node.log_p > log_p; });
  if (after == nodes.begin()) return nodes.front().s;
  if (after == nodes.end()) return nodes.back().s;
  const Node& l = *(after - 1);
  const Node& r = *after;
  double from = l.s;
  double up_to = r.s;
  double s = from + (up_to - from) * (l.log_p - log_p) / (l.log_p - r.log_p);
  for (int iteration = 0; iteration < 8; ++iteration) {
    const double off = at(s).log_p - log_p;
    if (std::abs(off) < 1e-9) break;
    (off > 0 ? from : up_to) = s;
    const double u = (s - l.s) / (r.s - l.s);
    s -= off / (l.dlog_p + u * (r.dlog_p - l.dlog_p));
    if (!(s > from && s < up_to)) s = 0.5 * (from + up_to);
  }
  return s;
}

SaturationCurve::SaturationCurve(std::shared_ptr<const Traced> traced) : traced_(std::move(traced)) {}

Result<SaturationCurve> SaturationCurve::trace(const std::shared_ptr<const Model>& model) {
  auto traced = std::make_shared<Traced>();
  const ModelComponent& fluid = model->component(0);
  if (!model->isPure()) return Error{"a saturation line is of a pure fluid"};
  traced->model = model;
  traced->T_critical = fluid.critical.T;
  traced->R = model->gasConstant(kPure);
  traced->T_low = fluid.T_triple > 0 ? fluid.T_triple : fluid.validity.T_from;
  traced->T_high = kHighest * fluid.critical.T;
  if (!(traced->T_low > 0 && traced->T_low < kStart * fluid.critical.T))
    return untraced(fluid, traced->T_low);
  const double first = traced->variable(traced->T_high);
  const double last = traced->variable(traced->T_low);
  const double h = (last - first) / (kNodes - 1);
  const auto s_of = [&](int i) { return first + h * i; };
  const auto T_of = [&](int i) {
    if (i == 0) return traced->T_high;
    if (i == kNodes - 1) return traced->T_low;
    return traced->T_critical * (1 - s_of(i) * s_of(i));
  };
  const int middle = std::clamp(static_cast<int>((std::sqrt(1 - kStart) - first) / h), 0, kNodes - 1);
  traced->nodes.resize(kNodes);
  const auto guess = traced->firstGuess(T_of(middle));
  const auto failed = [&](int i) { return untraced(fluid, T_of(i)); };
  if (!guess) return failed(middle);
  const auto start = traced->node(s_of(middle), T_of(middle), *guess);
  if (!start) return failed(middle);
  traced->nodes[static_cast<std::size_t>(middle)] = *start;
  for (const int direction : {1, -1}) {
    for (int i = middle + direction; i >= 0 && i < kNodes; i += direction) {
      const Node& from = traced->nodes[static_cast<std::size_t>(i - direction)];
      const double ds = direction * h;
      const auto next = traced->node(
          s_of(i), T_of(i), {from.x + ds * from.dx, from.y + ds * from.dy, from.log_p + ds * from.dlog_p});
      if (!next) return failed(i);
      traced->nodes[static_cast<std::size_t>(i)] = *next;
    }
  }
  traced->p_low = std::exp(traced->nodes.back().log_p);
  traced->p_high = std::exp(traced->nodes.front().log_p);
  return SaturationCurve(std::move(traced));
}

double SaturationCurve::lowestT() const {
  return traced_->T_low;
}
double SaturationCurve::highestT() const {
  return traced_->T_high;
}
double SaturationCurve::lowestP() const {
  return traced_->p_low;
}
double SaturationCurve::highestP() const {
  return traced_->p_high;
}

SaturationCurve::Estimate SaturationCurve::near(double T) const {
  const auto point = traced_->at(traced_->variable(T));
  return {std::exp(point.log_p), std::exp(point.x), std::exp(point.y)};
}

double SaturationCurve::temperatureNear(double p) const {
  const double s = traced_->variableAt(std::log(p));
  return traced_->T_critical * (1 - s * s);
}

void SaturationCurve::atT(int count, const Row& T, SaturationTile& out) const {
  Lanes lanes;
  for (int k = 0; k < count; ++k) {
    const bool inside = T[k] >= traced_->T_low && T[k] <= traced_->T_high;
    const double bounded = inside ? T[k] : traced_->T_high;
    const auto point = traced_->at(traced_->variable(bounded));
    out.T[k] = bounded;
    out.p[k] = std::exp(point.log_p);
    out.rho_liquid[k] = std::exp(point.x);
    out.rho_vapour[k] = std::exp(point.y);
    out.converged[static_cast<std::size_t>(k)] = false;
    if (!inside) continue;
    lanes.lane[static_cast<std::size_t>(lanes.count)] = k;
    lanes.T[lanes.count] = T[k];
    lanes.x[lanes.count] = point.x;
    lanes.y[lanes.count] = point.y;
    ++lanes.count;
  }
  traced_->solve(Traced::Given::T, lanes, T, out);
}

void SaturationCurve::atP(int count, const Row& p, SaturationTile& out) const {
  Lanes lanes;
  for (int k = 0; k < count; ++k) {
    // An end's pressure comes back from atT rounded: it still belongs to the line.
    const bool inside =
        p[k] >= traced_->p_low * (1 - kPressureRounding) && p[k] <= traced_->p_high * (1 + kPressureRounding);
    const double s = inside ? traced_->variableAt(std::log(p[k])) : traced_->nodes.front().s;
    const auto point = traced_->at(s);
    out.T[k] = traced_->T_critical * (1 - s * s);
    out.p[k] = std::exp(point.log_p);
    out.rho_liquid[k] = std::exp(point.x);
    out.rho_vapour[k] = std::exp(point.y);
    out.converged[static_cast<std::size_t>(k)] = false;
    if (!inside) continue;
    lanes.lane[static_cast<std::size_t>(lanes.count)] = k;
    lanes.T[lanes.count] = out.T[k];
    lanes.x[lanes.count] = point.x;
    lanes.y[lanes.count] = point.y;
    ++lanes.count;
  }
  traced_->solve(Traced::Given::p, lanes, p, out);
}

}  // namespace holdfast::thermo
