#include "coordinator/program/study_file.hpp"

#include <fstream>
#include <iterator>

namespace holdfast::coordinator {

Result<v1::SubmitRequest> readStudyFile(const std::filesystem::path& file) {
  constexpr std::streamsize kMostBytes = 1 << 20;
  std::ifstream in(file, std::ios::binary);
  std::string text(static_cast<std::size_t>(kMostBytes) + 1, '\0');
  if (!in || std::filesystem::is_directory(file)) return Error{file.string() + ": cannot be read"};
  in.read(text.data(), kMostBytes + 1);
  if (in.bad()) return Error{file.string() + ": cannot be read"};
  if (in.gcount() > kMostBytes) return Error{file.string() + ": a study may have at most 1 MiB of text"};
  text.resize(static_cast<std::size_t>(in.gcount()));
  v1::SubmitRequest request;
  request.set_name(file.stem().string());
  request.set_text(std::move(text));
  request.set_file_label(file.string());
  return request;
}

}  // namespace holdfast::coordinator
