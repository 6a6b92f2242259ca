#include "coordinator/program/answers.hpp"

#include <algorithm>
#include <array>
#include <cstdio>
#include <optional>

#include "thermo/state.hpp"

namespace holdfast::coordinator {
namespace {

std::string digits(double value, const char* form) {
  std::array<char, 40> text{};
  std::snprintf(text.data(), text.size(), form, value);
  return text.data();
}

int states(const Answers& answers) {
  return answers.request.first_values_size();
}

std::optional<double> value(const Answers& answers, int state, std::size_t column) {
  const std::size_t i = static_cast<std::size_t>(state) * answers.columns.size() + column;
  const std::string& presence = answers.reply.presence();
  if (i / 8 >= presence.size() || ((static_cast<unsigned char>(presence[i / 8]) >> (i % 8)) & 1U) == 0)
    return std::nullopt;
  return answers.reply.values(static_cast<int>(i));
}

std::string_view phase(const Answers& answers, int state) {
  return nameOf(static_cast<thermo::Phase>(answers.reply.phase()[static_cast<std::size_t>(state)]));
}
std::string_view outcome(const Answers& answers, int state) {
  return nameOf(static_cast<thermo::Outcome>(answers.reply.outcome()[static_cast<std::size_t>(state)]));
}

std::string csvField(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string out = "\"";
  for (const char c : text) {
    if (c == '"') out += '"';
    out += c;
  }
  return out + '"';
}

std::string jsonText(std::string_view text) {
  std::string out = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') out += '\\';
    out += c;
  }
  return out + '"';
}

}  // namespace

std::string asTable(const Answers& answers) {
  std::vector<std::vector<std::string>> rows(static_cast<std::size_t>(states(answers)) + 1);
  rows[0] = {answers.request.first(), answers.request.second(), "phase", "outcome"};
  rows[0].insert(rows[0].end(), answers.columns.begin(), answers.columns.end());
  for (int k = 0; k < states(answers); ++k) {
    auto& row = rows[static_cast<std::size_t>(k) + 1];
    row = {digits(answers.request.first_values(k), "%.6g"), digits(answers.request.second_values(k), "%.6g"),
           std::string(phase(answers, k)), std::string(outcome(answers, k))};
    for (std::size_t c = 0; c < answers.columns.size(); ++c) {
      const auto there = value(answers, k, c);
      row.push_back(there ? digits(*there, "%.6g") : "-");
    }
  }
  std::vector<std::size_t> width(rows[0].size());
  for (const auto& row : rows)
    for (std::size_t c = 0; c < row.size(); ++c) width[c] = std::max(width[c], row[c].size());
  std::string out;
  for (const auto& row : rows) {
    for (std::size_t c = 0; c < row.size(); ++c) {
      out += row[c];
      if (c + 1 < row.size()) out.append(width[c] - row[c].size() + 2, ' ');
    }
    out += '\n';
  }
  return out;
}

std::string asCsv(const Answers& answers) {
  std::string out;
  for (std::size_t c = 0; c < answers.columns.size(); ++c)
    out += (c == 0 ? "" : ",") + csvField(answers.columns[c]);
  out += "\r\n";
  for (int k = 0; k < states(answers); ++k) {
    for (std::size_t c = 0; c < answers.columns.size(); ++c) {
      if (c > 0) out += ',';
      if (const auto there = value(answers, k, c)) out += digits(*there, "%.17g");
    }
    out += "\r\n";
  }
  return out;
}

std::string asJson(const Answers& answers) {
  std::string out = "[";
  for (int k = 0; k < states(answers); ++k) {
    out += k == 0 ? "\n  {" : ",\n  {";
    out += jsonText(answers.request.first()) + ": " + digits(answers.request.first_values(k), "%.17g") +
           ", " + jsonText(answers.request.second()) + ": " +
           digits(answers.request.second_values(k), "%.17g") + ", \"phase\": " + jsonText(phase(answers, k)) +
           ", \"outcome\": " + jsonText(outcome(answers, k)) + ", \"values\": {";
    for (std::size_t c = 0; c < answers.columns.size(); ++c) {
      const auto there = value(answers, k, c);
      out += (c == 0 ? "" : ", ") + jsonText(answers.columns[c]) + ": " +
             (there ? digits(*there, "%.17g") : "null");
    }
    out += "}}";
  }
  return out + "\n]\n";
}

std::vector<std::string> whyNotComputed(const Answers& answers) {
  std::vector<std::string> out;
  for (int k = 0; k < states(answers); ++k) {
    const auto found = static_cast<thermo::Outcome>(answers.reply.outcome()[static_cast<std::size_t>(k)]);
    if (found == thermo::Outcome::ok || found == thermo::Outcome::extrapolated) continue;
    out.push_back("state " + std::to_string(k + 1) + ": " + std::string(nameOf(found)) + ": " +
                  answers.reply.reason(k));
  }
  return out;
}

std::vector<std::string> whyAbsent(const Answers& answers) {
  std::vector<std::string> out;
  for (std::size_t c = 0; c < answers.columns.size(); ++c)
    if (const std::string& absence = answers.reply.absence(static_cast<int>(c)); !absence.empty())
      out.push_back(answers.columns[c] + ": " + absence);
  return out;
}

}  // namespace holdfast::coordinator
