// LedgerTrouble: why a ledger cannot be used.
#pragma once

#include <stdexcept>
#include <string>

namespace leat {

class LedgerTrouble : public std::runtime_error {
 public:
  enum Kind {
    not_a_ledger,  // another kind of file, or one of a newer leat: a fault of the input
    damaged,       // was a ledger
    locked,        // somebody else is at work on it
    machine,       // disk full, no permission, not there
  };
  LedgerTrouble(Kind kind, const std::string& text) : std::runtime_error(text), kind_(kind) {}
  Kind kind() const { return kind_; }

 private:
  Kind kind_;
};

}  // namespace leat
