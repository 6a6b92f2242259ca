// A study's file as the commands take it.
#pragma once

#include <filesystem>
#include <string>

#include "holdfast.pb.h"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// A request to submit the study of a file: name from the file's stem. The Error says why the file cannot be
/// read.
Result<v1::SubmitRequest> readStudyFile(const std::filesystem::path& file);

}  // namespace holdfast::coordinator
