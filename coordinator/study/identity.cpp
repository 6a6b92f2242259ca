// What a study is: plan, data and build, in one digest.
#include <google/protobuf/io/coded_stream.h>
#include <google/protobuf/io/zero_copy_stream_impl_lite.h>
#include <openssl/evp.h>

#include <array>
#include <cassert>
#include <memory>

#include "coordinator/study/study.hpp"

namespace holdfast::coordinator {
namespace {

std::string deterministicBytes(const v1::Plan& plan) {
  std::string bytes;
  google::protobuf::io::StringOutputStream stream(&bytes);
  google::protobuf::io::CodedOutputStream coded(&stream);
  coded.SetSerializationDeterministic(true);
  plan.SerializeToCodedStream(&coded);
  coded.Trim();
  return bytes;
}

std::string hexadecimal(const unsigned char* bytes, std::size_t count) {
  constexpr std::string_view kDigits = "0123456789abcdef";
  std::string text;
  for (std::size_t i = 0; i < count; ++i) {
    text += kDigits[bytes[i] >> 4U];
    text += kDigits[bytes[i] & 0xFU];
  }
  return text;
}

}  // namespace

std::string identityOf(const v1::Plan& plan, const thermo::FluidLibrary& library, std::string_view build) {
  v1::Plan what_counts = plan;
  what_counts.clear_title();
  // Each part goes in with its length before it: no two different triples give the same bytes.
  std::string bytes;
  const std::string plan_bytes = deterministicBytes(what_counts);
  for (const std::string_view part :
       {std::string_view(library.digest()), build, std::string_view(plan_bytes)})
    bytes.append(std::to_string(part.size())).append(":").append(part);
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned int length = 0;
  [[maybe_unused]] const int done =
      EVP_Digest(bytes.data(), bytes.size(), digest.data(), &length, EVP_sha256(), nullptr);
  assert(done == 1);
  return hexadecimal(digest.data(), length);
}

}  // namespace holdfast::coordinator
