#include "sim/study/digest.hpp"

#include <fmt/format.h>
#include <xxhash.h>

#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>
#include <new>

namespace leat {

struct Digest::State {
  XXH3_state_t* xxh = XXH3_createState();
  State() {
    if (xxh == nullptr) throw std::bad_alloc();
    XXH3_128bits_reset(xxh);
  }
  ~State() { XXH3_freeState(xxh); }
  State(const State&) = delete;
  State& operator=(const State&) = delete;

  // Lowest byte first on every machine.
  void add(std::uint64_t word) {
    unsigned char bytes[8];
    for (int b = 0; b < 8; ++b) bytes[b] = static_cast<unsigned char>(word >> (8 * b));
    XXH3_128bits_update(xxh, bytes, sizeof bytes);
  }
};

Digest::Digest() : state_(std::make_unique<State>()) {}
Digest::~Digest() = default;

void Digest::add_text(std::string_view text) {
  state_->add(text.size());
  XXH3_128bits_update(state_->xxh, text.data(), text.size());
}

void Digest::add_count(long long count) { state_->add(static_cast<std::uint64_t>(count)); }

void Digest::add_number(double number) {
  if (std::isnan(number)) number = std::numeric_limits<double>::quiet_NaN();
  if (number == 0) number = 0.0;
  state_->add(std::bit_cast<std::uint64_t>(number));
}

std::string Digest::hex() const {
  const XXH128_hash_t hash = XXH3_128bits_digest(state_->xxh);
  return fmt::format("{:016x}{:016x}", hash.high64, hash.low64);
}

}  // namespace leat
