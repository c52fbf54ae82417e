// Digest: XXH3 of 128 bits over texts and numbers, one after the other; tells equal from unequal, guards no secret.
#pragma once

#include <memory>
#include <string>
#include <string_view>

namespace leat {

class Digest {
 public:
  Digest();
  ~Digest();
  Digest(const Digest&) = delete;
  Digest& operator=(const Digest&) = delete;

  void add_text(std::string_view text);   // with its length, so that neighbours cannot run into each other
  void add_count(long long count);
  void add_number(double number);         // bit by bit; every NaN is one, and -0 is 0, as a ledger keeps them
  std::string hex() const;                // 32 digits

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace leat
