#include "sim/results/result_view.hpp"

#include <fmt/format.h>

#include <cmath>

#include "models/core/check.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/table_text.hpp"

namespace leat {

std::size_t ResultView::size(std::string_view axis) const { return axis_size(results_, axis); }

const std::vector<std::string>& ResultView::labels(std::string_view axis) const {
  static const std::vector<std::string> none;
  const Axis* found = find_axis(results_, axis);
  return found ? found->labels : none;
}

bool ResultView::has(std::string_view variable) const { return find_variable(results_, variable) != nullptr; }

double ResultView::at(std::string_view variable, std::initializer_list<std::size_t> indices) const {
  const Variable* found = find_variable(results_, variable);
  if (!found) return std::nan("");
  check(indices.size() == found->axes.size(), "an index for each axis of a variable");
  std::size_t place = 0;
  auto axis = found->axes.begin();
  for (const std::size_t index : indices) {
    const std::size_t count = size(*axis++);
    if (index >= count) return std::nan("");
    place = place * count + index;
  }
  return place < found->values.size() ? found->values[place] : std::nan("");
}

std::string ResultView::text(std::string_view texts, std::size_t index) const {
  const TextTable* found = find_texts(results_, texts);
  return found && index < found->values.size() ? found->values[index] : std::string();
}

std::string ResultView::attribute(std::string_view name) const { return leat::attribute(results_, name); }

Moment::Moment(const ResultView& view) : view_(view), steady_(view.has("steady_ph")) {
  const Axis* time = find_axis(view.results(), "time");
  row_ = time && time->size() > 0 ? time->size() - 1 : 0;
  words_ = steady_ ? "at steady state" : fmt::format("at {} h, no steady state found", time && !time->values.empty() ? significant(time->values[row_]) : "0");
}

double Moment::at(const std::string& variable, std::initializer_list<std::size_t> indices) const {
  if (steady_) return view_.at("steady_" + variable, indices);
  switch (indices.size()) {
    case 0: return view_.at(variable, {row_});
    case 1: return view_.at(variable, {row_, indices.begin()[0]});
    default: return view_.at(variable, {row_, indices.begin()[0], indices.begin()[1]});
  }
}

}  // namespace leat
