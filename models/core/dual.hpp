#pragma once
#include <array>
#include <cmath>

namespace leat {

// A number with derivatives along N directions (forward mode), so that an equation written once gives its Jacobian.
template <int N>
struct DualNumber {
  double value = 0;
  std::array<double, N> slope{};

  DualNumber() = default;
  DualNumber(double v) : value(v) {}  // NOLINT: a plain number is a constant

  DualNumber& operator+=(const DualNumber& b) {
    value += b.value;
    for (int k = 0; k < N; ++k) slope[k] += b.slope[k];
    return *this;
  }
  DualNumber& operator-=(const DualNumber& b) {
    value -= b.value;
    for (int k = 0; k < N; ++k) slope[k] -= b.slope[k];
    return *this;
  }
  friend DualNumber operator+(DualNumber a, const DualNumber& b) { return a += b; }
  friend DualNumber operator-(DualNumber a, const DualNumber& b) { return a -= b; }
  friend DualNumber operator-(const DualNumber& a) { return DualNumber(0.0) - a; }
  friend DualNumber operator*(const DualNumber& a, const DualNumber& b) {
    DualNumber c(a.value * b.value);
    for (int k = 0; k < N; ++k) c.slope[k] = a.slope[k] * b.value + a.value * b.slope[k];
    return c;
  }
  friend DualNumber operator/(const DualNumber& a, const DualNumber& b) {
    DualNumber c(a.value / b.value);
    for (int k = 0; k < N; ++k) c.slope[k] = (a.slope[k] - c.value * b.slope[k]) / b.value;
    return c;
  }
  friend bool operator<(const DualNumber& a, const DualNumber& b) { return a.value < b.value; }
  friend bool operator>(const DualNumber& a, const DualNumber& b) { return a.value > b.value; }
};

using Dual = DualNumber<8>;  // eight directions a pass

inline double value_of(double x) { return x; }
template <int N>
double value_of(const DualNumber<N>& x) { return x.value; }

}  // namespace leat
