#include "models/rates/first_order.hpp"

#include <cmath>

#include "models/core/constants.hpp"

namespace leat {
namespace {

constexpr double used_up = 1e-3;       // of a consumed oxidant or reductant [mol/m3]
constexpr double linear_below = 1e-9;  // of the reference concentration

class FirstOrder final : public RateLaw {
 public:
  FirstOrder(std::string of_kind, const LawSettings& settings)
      : name_(std::move(of_kind)), constant_(settings.values.at("constant")), orders_(settings.orders), has_saturation_(settings.saturation_phase >= 0) {
    const auto value = [&](const char* name, double otherwise) {
      const auto found = settings.values.find(name);
      return found == settings.values.end() ? otherwise : found->second;
    };
    activation_energy_ = value("activation_energy", 0);
    reference_temperature_ = value("at_temperature", 298.15);
    for (const RateOrder& order : orders_) probes_.push_back(order.probe);
    if (has_saturation_) probes_.push_back({ProbeKind::saturation, settings.saturation_phase});
    needed_begin_ = static_cast<int>(probes_.size());
    probes_.insert(probes_.end(), settings.needed.begin(), settings.needed.end());
  }

  std::string_view name() const override { return name_; }
  std::span<const Probe> probes() const override { return probes_; }

  double speed(std::span<const double> values, double temperature, std::span<double> slopes) const override {
    double g = constant_ * std::exp(-activation_energy_ / gas_constant * (1 / temperature - 1 / reference_temperature_));
    // Product of factors; each slope is g times d ln(factor), taken as factor' over factor where that is finite.
    const std::size_t n = probes_.size();
    double product = 1;
    for (std::size_t k = 0; k < n; ++k) product *= factor(static_cast<int>(k), values[k]).value;
    for (std::size_t k = 0; k < n; ++k) {
      double others = 1;
      for (std::size_t l = 0; l < n; ++l)
        if (l != k) others *= factor(static_cast<int>(l), values[l]).value;
      slopes[k] = g * others * factor(static_cast<int>(k), values[k]).slope;
    }
    return g * product;
  }

 private:
  struct Factor {
    double value, slope;
  };
  Factor factor(int k, double x) const {
    if (k < static_cast<int>(orders_.size())) {
      const RateOrder& order = orders_[k];
      const double ratio = x / order.at;
      if (ratio <= 0) return {0, order.order == 1 ? 1 / order.at : 0};
      if (ratio < linear_below && order.order < 1) {
        const double slope = std::pow(linear_below, order.order - 1) / order.at;
        return {slope * x, slope};
      }
      const double value = std::pow(ratio, order.order);
      return {value, order.order * value / x};
    }
    if (has_saturation_ && k == needed_begin_ - 1) return x < 1 ? Factor{1 - x, -1} : Factor{0, 0};
    const double m = x > 0 ? x : 0;
    return {m / (m + used_up), used_up / ((m + used_up) * (m + used_up))};
  }

  std::string name_;
  double constant_;                // k [1/s]
  double activation_energy_ = 0;   // [J/mol]
  double reference_temperature_ = 298.15;  // [K]
  std::vector<RateOrder> orders_;
  bool has_saturation_;
  int needed_begin_ = 0;
  std::vector<Probe> probes_;
};

}  // namespace

LawKind first_order_kind() {
  LawKind kind;
  kind.name = "first_order";
  kind.summary = "first order in what is left, with orders in the liquor, to saturation or to an ultimate extraction";
  kind.parameters = {
      {"constant", "1/s", true, {}, 0, 1e3, "rate constant at the conditions of `at`", ""},
      {"activation_energy", "J/mol", false, 0.0, 0, 5e5, "Arrhenius activation energy; without it the constant holds at every temperature", ""},
      {"at_temperature", "K", false, {}, 200, 500, "temperature at which the constant was measured", ""}};
  kind.make = [](const LawSettings& settings) { return make_first_order("first_order", settings); };
  return kind;
}

std::shared_ptr<const RateLaw> make_first_order(const std::string& name, const LawSettings& settings) {
  return std::make_shared<FirstOrder>(name, settings);
}

}  // namespace leat
