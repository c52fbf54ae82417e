#include "models/chemistry/formula.hpp"

#include <array>
#include <cctype>
#include <charconv>

namespace leat {
namespace {

constexpr std::array<std::string_view, 8> phase_suffixes = {"(aq)", "(s)", "(g)", "(am)", "(l)", "(alpha)", "(beta)", "(gamma)"};

std::string_view without_phase(std::string_view text) {
  for (std::string_view suffix : phase_suffixes)
    if (text.size() > suffix.size() && text.ends_with(suffix)) return text.substr(0, text.size() - suffix.size());
  return text;
}

// Recursive descent over one formula; position and fault are shared by all levels.
class FormulaReader {
 public:
  FormulaReader(std::string_view text, std::string& fault) : text_(text), fault_(fault) {}

  bool read(Formula& formula) {
    if (text_ == "e^-") {
      formula.charge = -1;
      return true;
    }
    if (text_.find('\0') != std::string_view::npos) return fail("it holds a NUL");
    while (at_ < text_.size() && text_[at_] != '^') {
      const double multiple = at_ > 0 || std::isdigit(static_cast<unsigned char>(text_[at_])) ? number() : 1;
      std::map<std::string, double> part;
      if (!group(part, '\0')) return false;
      if (part.empty()) return fail("a part of it has no element");
      for (const auto& [element, count] : part) formula.atoms[element] += multiple * count;
      if (at_ < text_.size() && text_[at_] == '.' && ++at_ == text_.size()) return fail("nothing follows the point");
    }
    if (formula.atoms.empty()) return fail("no element found");
    if (zero_) return fail("a count of zero");
    return charge(formula);
  }

 private:
  bool fail(std::string why) {
    fault_ = "'" + std::string(text_) + "' is not a formula: " + why;
    return false;
  }

  double number() {
    const std::size_t begin = at_;
    while (at_ < text_.size() && std::isdigit(static_cast<unsigned char>(text_[at_]))) ++at_;
    if (at_ < text_.size() && text_[at_] == '.' && at_ > begin && at_ + 1 < text_.size() &&
        std::isdigit(static_cast<unsigned char>(text_[at_ + 1])) && fraction_before_element(at_ + 1)) {
      ++at_;
      while (at_ < text_.size() && std::isdigit(static_cast<unsigned char>(text_[at_]))) ++at_;
    }
    if (at_ == begin) return 1;
    double value = 1;
    std::from_chars(text_.data() + begin, text_.data() + at_, value);
    zero_ = zero_ || !(value > 0);
    return value;
  }

  // `CaSO3.0.5H2O`: a fraction only opens a hydrate; `CaSO4.2H2O` has none.
  bool fraction_before_element(std::size_t from) const {
    return from >= 2 && text_[from - 2] == '0' && (from < 3 || text_[from - 3] == '.');
  }

  bool group(std::map<std::string, double>& atoms, char closing) {
    while (at_ < text_.size()) {
      const char c = text_[at_];
      if (c == closing) return true;
      if (c == '^' || (c == '.' && closing == '\0')) return closing == '\0' ? true : fail("a bracket is not closed");
      if (c == '(' || c == '[') {
        const char mate = c == '(' ? ')' : ']';
        ++at_;
        std::map<std::string, double> inner;
        if (!group(inner, mate)) return false;
        if (at_ >= text_.size()) return fail("a bracket is not closed");
        if (inner.empty()) return fail("a bracket is empty");
        ++at_;
        const double multiple = number();
        for (const auto& [element, count] : inner) atoms[element] += multiple * count;
      } else if (std::isupper(static_cast<unsigned char>(c))) {
        std::string element(1, c);
        ++at_;
        while (at_ < text_.size() && std::islower(static_cast<unsigned char>(text_[at_]))) element += text_[at_++];
        atoms[element] += number();
      } else {
        return fail(std::string("unexpected '") + c + "'");
      }
    }
    return closing == '\0' ? true : fail("a bracket is not closed");
  }

  bool charge(Formula& formula) {
    if (at_ >= text_.size()) return true;
    ++at_;  // the caret
    const std::string_view rest = text_.substr(at_);
    if (rest.empty()) return fail("no charge after '^'");
    const char sign = rest.back();
    if (sign != '+' && sign != '-') return fail("a charge ends in + or -, as in ^2-");
    double size = 1;
    if (rest.size() > 1) {
      int digits = 0;
      const auto [end, error] = std::from_chars(rest.data(), rest.data() + rest.size() - 1, digits);
      if (error != std::errc() || end != rest.data() + rest.size() - 1 || digits < 1 || digits > 9)
        return fail("the charge is a digit and a sign, as in ^2-");
      size = digits;
    }
    formula.charge = sign == '+' ? size : -size;
    return true;
  }

  std::string_view text_;
  std::string& fault_;
  std::size_t at_ = 0;
  bool zero_ = false;  // a count of zero was read
};

std::string_view trim(std::string_view text) {
  while (!text.empty() && std::isspace(static_cast<unsigned char>(text.front()))) text.remove_prefix(1);
  while (!text.empty() && std::isspace(static_cast<unsigned char>(text.back()))) text.remove_suffix(1);
  return text;
}

bool read_side(std::string_view side, double sign, std::vector<ReactionTerm>& terms, std::string& fault) {
  std::size_t at = 0;
  while (at <= side.size()) {
    std::size_t next = side.find(" + ", at);
    if (next == std::string_view::npos) next = side.size();
    std::string_view term = trim(side.substr(at, next - at));
    if (term.empty()) {
      fault = "a term is missing in the reaction";
      return false;
    }
    double coefficient = 1;
    const std::size_t space = term.find(' ');
    if (space != std::string_view::npos) {
      const auto [end, error] = std::from_chars(term.data(), term.data() + space, coefficient);
      if (error != std::errc() || end != term.data() + space || !(coefficient > 0) || !(coefficient < 1e6)) {
        fault = "'" + std::string(term) + "' is not a coefficient, a space and a name";
        return false;
      }
      term = trim(term.substr(space));
    }
    terms.push_back({std::string(term), sign * coefficient});
    at = next + 3;
    if (next == side.size()) break;
  }
  return true;
}

}  // namespace

std::optional<Formula> parse_formula(std::string_view text, std::string& fault) {
  Formula formula;
  FormulaReader reader(without_phase(text), fault);
  if (text.empty()) {
    fault = "a formula is missing";
    return std::nullopt;
  }
  if (!reader.read(formula)) return std::nullopt;
  return formula;
}

std::optional<std::vector<ReactionTerm>> parse_reaction(std::string_view text, std::string& fault) {
  const std::size_t equals = text.find('=');
  if (equals == std::string_view::npos || text.find('=', equals + 1) != std::string_view::npos) {
    fault = "a reaction has one '=' sign";
    return std::nullopt;
  }
  std::vector<ReactionTerm> terms;
  if (!read_side(trim(text.substr(0, equals)), -1, terms, fault)) return std::nullopt;
  if (!read_side(trim(text.substr(equals + 1)), +1, terms, fault)) return std::nullopt;
  return terms;
}

}  // namespace leat
