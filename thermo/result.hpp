// Errors as values: what every function at a module border returns when it may fail.
#pragma once

#include <cassert>
#include <string>
#include <utility>
#include <variant>

namespace holdfast {

/// A failure in words a user can act on: what was wrong, where, and what would be right.
struct Error {
  std::string message;
};

/// Either a T or an Error. Reading the side that is not there is a programming error (asserted).
template <class T>
class [[nodiscard]] Result {
 public:
  Result(T value)
      : content_(std::in_place_index<0>, std::move(value)) {}  // NOLINT(google-explicit-constructor)
  Result(Error error)
      : content_(std::in_place_index<1>, std::move(error)) {}  // NOLINT(google-explicit-constructor)

  bool ok() const { return content_.index() == 0; }
  explicit operator bool() const { return ok(); }

  const T& value() const& {
    assert(ok());
    return *std::get_if<0>(&content_);
  }
  T& value() & {
    assert(ok());
    return *std::get_if<0>(&content_);
  }
  T&& value() && {
    assert(ok());
    return std::move(*std::get_if<0>(&content_));
  }
  const T& operator*() const& { return value(); }
  T& operator*() & { return value(); }
  const T* operator->() const { return &value(); }
  T* operator->() { return &value(); }

  const Error& error() const {
    assert(!ok());
    return *std::get_if<1>(&content_);
  }

 private:
  std::variant<T, Error> content_;
};

/// Success without a value, or an Error.
using Status = Result<std::monostate>;

inline Status success() {
  return Status(std::monostate{});
}

}  // namespace holdfast
