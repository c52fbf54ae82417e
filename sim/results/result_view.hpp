// ResultView: numbers and labels of a ResultSet by name, for tables and text; what a file does not have reads as NaN or "".
#pragma once

#include <initializer_list>
#include <string>
#include <string_view>
#include <vector>

#include "sim/results/result_set.hpp"

namespace leat {

class ResultView {
 public:
  explicit ResultView(const ResultSet& results) : results_(results) {}

  std::size_t size(std::string_view axis) const;
  const std::vector<std::string>& labels(std::string_view axis) const;  // empty where there is no such axis, or one of numbers
  bool has(std::string_view variable) const;
  double at(std::string_view variable, std::initializer_list<std::size_t> indices) const;
  std::string text(std::string_view texts, std::size_t index = 0) const;
  std::string attribute(std::string_view name) const;
  const ResultSet& results() const { return results_; }

 private:
  const ResultSet& results_;
};

// The moment a run's tables are of: the steady state or, where none was found, the last stored time.
class Moment {
 public:
  explicit Moment(const ResultView& view);
  bool steady() const { return steady_; }
  const std::string& words() const { return words_; }  // "at steady state"
  double at(const std::string& variable, std::initializer_list<std::size_t> indices) const;  // indices without time

 private:
  const ResultView& view_;
  bool steady_ = false;
  std::size_t row_ = 0;
  std::string words_;
};

}  // namespace leat
