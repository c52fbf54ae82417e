#include "models/rates/at_once.hpp"

namespace leat {
namespace {

class AtOnce final : public RateLaw {
 public:
  explicit AtOnce(double within) : speed_(1 / within) {}
  std::string_view name() const override { return "at_once"; }
  std::span<const Probe> probes() const override { return {}; }
  double speed(std::span<const double>, double, std::span<double>) const override { return speed_; }

 private:
  double speed_;  // [1/s]
};

}  // namespace

LawKind at_once_kind() {
  LawKind kind;
  kind.name = "at_once";
  kind.summary = "dissolves within seconds";
  kind.parameters = {{"within", "s", false, 10.0, 0.1, 3600, "time constant", "common practice, no source"}};
  kind.make = [](const LawSettings& settings) { return std::make_shared<AtOnce>(settings.values.at("within")); };
  return kind;
}

}  // namespace leat
