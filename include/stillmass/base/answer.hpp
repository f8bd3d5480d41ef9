#pragma once

#include <string>
#include <utility>
#include <variant>

namespace stillmass::base {

/// Why the recordings do not support an answer, and what to measure so that they do.
struct Refusal {
  std::string code;     ///< lower-case words joined by hyphens
  std::string seen;     ///< what was seen in the data
  std::string measure;  ///< what to measure next
  bool operator==(const Refusal&) const = default;
};

/// The answer to a question put to data: a T, or a refusal. Not for faults: those throw `Error`.
template <class T>
class Answer {
 public:
  Answer(T value) : held_(std::in_place_index<0>, std::move(value)) {}            // NOLINT(google-explicit-constructor)
  Answer(Refusal refusal) : held_(std::in_place_index<1>, std::move(refusal)) {}  // NOLINT(google-explicit-constructor)

  explicit operator bool() const { return held_.index() == 0; }
  /// The value; throws std::bad_variant_access where there is a refusal.
  const T& value() const { return std::get<0>(held_); }
  T& value() { return std::get<0>(held_); }
  const T& operator*() const { return value(); }
  T& operator*() { return value(); }
  const T* operator->() const { return &value(); }
  T* operator->() { return &value(); }
  /// The refusal; throws std::bad_variant_access where there is a value.
  const Refusal& refusal() const { return std::get<1>(held_); }

 private:
  std::variant<T, Refusal> held_;
};

}  // namespace stillmass::base
