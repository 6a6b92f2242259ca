#include "coordinator/study/units.hpp"

#include <udunits2.h>

#include <array>
#include <charconv>
#include <cmath>
#include <memory>
#include <mutex>
#include <string>

#include "coordinator/study/wording.hpp"

namespace holdfast::coordinator {
namespace {

struct FreeSystem {
  void operator()(ut_system* system) const { ut_free_system(system); }
};
struct FreeUnit {
  void operator()(ut_unit* unit) const { ut_free(unit); }
};
struct FreeConverter {
  void operator()(cv_converter* converter) const { cv_free(converter); }
};
using Unit = std::unique_ptr<ut_unit, FreeUnit>;

// UDUNITS-2 keeps its parser and its status in global variables: one thread at a time.
std::mutex& udunitsMutex() {
  static std::mutex mutex;
  return mutex;
}

/// The unit database, read once; null where UDUNITS-2 does not find its files. Under the mutex.
ut_system* unitSystem() {
  static const std::unique_ptr<ut_system, FreeSystem> system = [] {
    ut_set_error_message_handler(ut_ignore);  // what is wrong goes into our Error, not to the terminal
    return std::unique_ptr<ut_system, FreeSystem>(ut_read_xml(nullptr));
  }();
  return system.get();
}

/// The unit in base units ("m2.s-2.K"), for messages.
std::string definitionOf(const ut_unit& unit) {
  std::array<char, 200> text{};
  const int length = ut_format(&unit, text.data(), text.size(), UT_ASCII | UT_DEFINITION);
  return length > 0 && static_cast<std::size_t>(length) < text.size() ? text.data() : std::string();
}

Error cannotConvert(std::string_view text, const std::string& unit_text, const ut_unit& unit,
                    std::string_view si_unit) {
  std::string message = inQuotes(text) + " is in " + inQuotes(unit_text);
  const std::string definition = definitionOf(unit);
  if (!definition.empty() && definition != unit_text) message += " (" + definition + ")";
  message += ", which does not convert to " + inQuotes(si_unit);
  if (si_unit == "K" && (unit_text == "C" || unit_text == "F"))
    message += " (did you mean " + inQuotes("deg" + unit_text) + "?)";
  return Error{message};
}

/// Converts a number in `unit_text` to SI. `text` is the whole, for messages.
Result<double> convert(std::string_view text, double number, const std::string& unit_text,
                       std::string_view si_unit) {
  const std::lock_guard lock(udunitsMutex());
  ut_system* const system = unitSystem();
  if (system == nullptr) return Error{"the unit database of UDUNITS-2 is not installed"};
  const Unit unit(ut_parse(system, unit_text.c_str(), UT_UTF8));
  if (!unit) return Error{"unknown unit " + inQuotes(unit_text) + " in " + inQuotes(text)};
  const Unit si(ut_parse(system, std::string(si_unit).c_str(), UT_UTF8));
  if (!si) return Error{"unknown unit " + inQuotes(si_unit)};
  if (ut_are_convertible(unit.get(), si.get()) == 0) return cannotConvert(text, unit_text, *unit, si_unit);
  const std::unique_ptr<cv_converter, FreeConverter> converter(ut_get_converter(unit.get(), si.get()));
  if (!converter) return cannotConvert(text, unit_text, *unit, si_unit);
  return cv_convert_double(converter.get(), number);
}

std::string_view trimmed(std::string_view text) {
  const auto first = text.find_first_not_of(" \t");
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(" \t") - first + 1);
}

}  // namespace

Result<double> parseQuantity(std::string_view text, std::string_view si_unit) {
  constexpr std::size_t kLongest = 200;  // bytes; no quantity needs more
  if (text.size() > kLongest) return Error{inQuotes(text) + " is too long for a quantity"};
  for (const char sign : text)
    if (static_cast<unsigned char>(sign) < ' ' && sign != '\t')
      return Error{inQuotes(text) + " holds a control character"};
  std::string_view rest = trimmed(text);
  if (rest.starts_with('+')) rest.remove_prefix(1);
  double number = 0;
  const auto [end, failure] = std::from_chars(rest.data(), rest.data() + rest.size(), number);
  if (failure == std::errc::result_out_of_range)
    return Error{"the number in " + inQuotes(text) + " is too large or too small"};
  if (failure != std::errc() || !std::isfinite(number))
    return Error{inQuotes(text) + " does not begin with a number"};
  rest = trimmed(rest.substr(static_cast<std::size_t>(end - rest.data())));
  if (rest.empty()) return number;
  // UDUNITS-2 would read more numbers as factors: "5,3 bar" and "5 5 bar" are slips of the pen.
  if (rest.find_first_of("0123456789+-.,*/") == 0)
    return Error{
        inQuotes(text) + " has " + inQuotes(rest.substr(0, 1)) +
        " where a unit should begin (a number has a decimal point and no blanks or thousands marks)"};
  auto value = convert(text, number, std::string(rest), si_unit);
  if (value && !std::isfinite(*value)) return Error{"the number in " + inQuotes(text) + " is too large"};
  return value;
}

}  // namespace holdfast::coordinator
