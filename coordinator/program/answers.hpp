// The answer of `evaluate` as text.
#pragma once

#include <string>
#include <vector>

#include "holdfast.pb.h"

namespace holdfast::coordinator {

/// A request, its reply, and the columns as they were written.
struct Answers {
  const v1::EvaluateRequest& request;
  const v1::EvaluateReply& reply;
  const std::vector<std::string>& columns;
};

/// A line a state for people, six digits.
std::string asTable(const Answers& answers);
/// RFC 4180, 17 significant digits; the header is the list of columns as written. Absent values are empty.
std::string asCsv(const Answers& answers);
/// RFC 8259: a list of objects, one a state; absent values are null.
std::string asJson(const Answers& answers);

/// A sentence for each state that has no numbers.
std::vector<std::string> whyNotComputed(const Answers& answers);
/// A sentence for each column that does not exist at some state which was computed.
std::vector<std::string> whyAbsent(const Answers& answers);

}  // namespace holdfast::coordinator
