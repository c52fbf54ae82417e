#include "sim/study/case_answer.hpp"

#include <cstdint>
#include <cstring>

#include "models/core/check.hpp"

namespace leat {
namespace {

void put(std::string& bytes, const void* data, std::size_t size) { bytes.append(static_cast<const char*>(data), size); }

void put(std::string& bytes, const std::string& text) {
  const std::uint64_t size = text.size();
  put(bytes, &size, sizeof size);
  bytes += text;
}

template <class Value>
Value take(std::string_view& bytes) {
  check(bytes.size() >= sizeof(Value), "a worker's answer ends early");
  Value value;
  std::memcpy(&value, bytes.data(), sizeof value);
  bytes.remove_prefix(sizeof value);
  return value;
}

std::string take_text(std::string_view& bytes) {
  const auto size = take<std::uint64_t>(bytes);
  check(bytes.size() >= size, "a worker's answer ends early");
  std::string text(bytes.substr(0, size));
  bytes.remove_prefix(size);
  return text;
}

}  // namespace

std::string to_bytes(const CaseAnswer& answer) {
  std::string bytes;
  const auto status = static_cast<std::int32_t>(answer.status);
  const std::uint64_t count = answer.watched.size();
  put(bytes, &status, sizeof status);
  put(bytes, &answer.file_written, 1);
  put(bytes, answer.reason);
  put(bytes, answer.cautions);
  put(bytes, &count, sizeof count);
  for (const WatchedValue& one : answer.watched) {
    put(bytes, &one.value, sizeof one.value);
    put(bytes, one.unit);
    put(bytes, one.meaning);
    put(bytes, one.missing);
  }
  return bytes;
}

CaseAnswer case_answer(std::string_view bytes) {
  CaseAnswer answer;
  answer.status = static_cast<CaseStatus>(take<std::int32_t>(bytes));
  answer.file_written = take<char>(bytes) != 0;
  check(answer.status >= CaseStatus::waiting && answer.status <= CaseStatus::machine_trouble, "a worker's answer has no status");
  answer.reason = take_text(bytes);
  answer.cautions = take_text(bytes);
  for (auto left = take<std::uint64_t>(bytes); left > 0; --left) {
    WatchedValue one;
    one.value = take<double>(bytes);
    one.unit = take_text(bytes);
    one.meaning = take_text(bytes);
    one.missing = take_text(bytes);
    answer.watched.push_back(std::move(one));
  }
  check(bytes.empty(), "a worker's answer goes on behind its end");
  return answer;
}

}  // namespace leat
