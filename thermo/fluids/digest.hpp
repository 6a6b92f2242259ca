// What identifies data: SHA-256 (FIPS 180-4).
#pragma once

#include <memory>
#include <string>
#include <string_view>

namespace holdfast::thermo {

/// Digests what is added, in order; where parts begin is for the caller to make plain.
class Digest {
 public:
  Digest();
  ~Digest();
  Digest(const Digest&) = delete;
  Digest& operator=(const Digest&) = delete;

  void add(std::string_view bytes);
  /// 64 hexadecimal digits. Nothing may be added afterwards.
  std::string finish();

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace holdfast::thermo
