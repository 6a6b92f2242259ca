#include "thermo/fluids/digest.hpp"

#include <openssl/evp.h>

#include <array>
#include <cassert>

namespace holdfast::thermo {

struct Digest::State {
  EVP_MD_CTX* context = EVP_MD_CTX_new();
  ~State() { EVP_MD_CTX_free(context); }
};

Digest::Digest() : state_(std::make_unique<State>()) {
  [[maybe_unused]] const int begun = EVP_DigestInit_ex(state_->context, EVP_sha256(), nullptr);
  assert(begun == 1);
}
Digest::~Digest() = default;

void Digest::add(std::string_view bytes) {
  EVP_DigestUpdate(state_->context, bytes.data(), bytes.size());
}

std::string Digest::finish() {
  std::array<unsigned char, EVP_MAX_MD_SIZE> bytes{};
  unsigned int length = 0;
  EVP_DigestFinal_ex(state_->context, bytes.data(), &length);
  std::string out;
  for (unsigned int i = 0; i < length; ++i) {
    out += "0123456789abcdef"[bytes[i] >> 4U];
    out += "0123456789abcdef"[bytes[i] & 15U];
  }
  return out;
}

}  // namespace holdfast::thermo
