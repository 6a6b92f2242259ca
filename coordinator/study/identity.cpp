// What a study is: plan, data and build, in one digest.
#include <google/protobuf/io/coded_stream.h>
#include <google/protobuf/io/zero_copy_stream_impl_lite.h>

#include "coordinator/study/study.hpp"
#include "thermo/fluids/digest.hpp"

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

}  // namespace

std::string identityOf(const v1::Plan& plan, const thermo::FluidLibrary& library, std::string_view build) {
  v1::Plan what_counts = plan;
  what_counts.clear_title();
  const std::string plan_bytes = deterministicBytes(what_counts);
  thermo::Digest digest;
  // Each part goes in with its length before it: no two different triples give the same bytes.
  for (const std::string_view part :
       {std::string_view(library.digest()), build, std::string_view(plan_bytes)}) {
    digest.add(std::to_string(part.size()) + ":");
    digest.add(part);
  }
  return digest.finish();
}

}  // namespace holdfast::coordinator
