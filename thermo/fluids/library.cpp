#include "thermo/fluids/library.hpp"

#include <algorithm>
#include <cstdlib>
#include <fstream>
#include <iterator>
#include <memory>

#include "thermo/fluids/csv.hpp"
#include "thermo/fluids/digest.hpp"
#include "thermo/fluids/reference_file.hpp"
#include "thermo/fluids/spelling.hpp"
#include "thermo/fluids/tables.hpp"

namespace holdfast::thermo {

namespace {

namespace fs = std::filesystem;

/// Files below a folder by their path relative to it, in name order, with their bytes.
using Files = std::map<std::string, std::string>;

Result<Files> readFiles(const fs::path& folder) {
  std::error_code fault;
  Files files;
  fs::recursive_directory_iterator walk(folder, fault);
  if (fault) return Error{"cannot read the fluid data in " + folder.string() + ": " + fault.message()};
  for (const auto& entry : walk) {
    if (!entry.is_regular_file()) continue;
    std::ifstream stream(entry.path(), std::ios::binary);
    std::string bytes{std::istreambuf_iterator<char>(stream), std::istreambuf_iterator<char>()};
    if (stream.bad()) return Error{entry.path().string() + ": cannot be read"};
    files[fs::relative(entry.path(), folder).generic_string()] = std::move(bytes);
  }
  return files;
}

Result<CsvTable> table(const Files& files, const std::string& name, const std::vector<std::string>& columns) {
  const auto found = files.find(name);
  if (found == files.end()) return Error{name + ": the file is missing from the fluid data"};
  return CsvTable::parse(name, found->second, columns);
}

/// The row of EVIDENCE.md that speaks of a file: the text of its last cell.
std::string evidenceOf(const Files& files, const std::string& stem) {
  const auto found = files.find("EVIDENCE.md");
  if (found == files.end()) return {};
  const std::size_t from = found->second.find("\n| " + stem + " |");
  if (from == std::string::npos) return {};
  std::string row = found->second.substr(from + 1, found->second.find('\n', from + 1) - from - 1);
  while (!row.empty() && (row.back() == ' ' || row.back() == '|' || row.back() == '\r')) row.pop_back();
  std::string cell = row.substr(row.rfind('|') + 1);
  cell.erase(0, cell.find_first_not_of(' '));
  std::erase(cell, '*');
  return cell;
}

/// Every spelling under which a fluid is found.
std::vector<std::string> spellings(const Fluid& fluid, const std::vector<ReferenceFluid>& references) {
  std::vector<std::string> out = {fluid.designation, fluid.name, fluid.cas};
  const std::size_t bracket = fluid.name.find(" (");
  if (bracket != std::string::npos && fluid.name.back() == ')') {
    out.push_back(fluid.name.substr(0, bracket));
    out.push_back(fluid.name.substr(bracket + 2, fluid.name.size() - bracket - 3));
  }
  if (fluid.reference) {
    out.push_back(references[*fluid.reference].file);
    out.push_back(references[*fluid.reference].name);
  }
  std::erase(out, "");
  return out;
}

}  // namespace

Result<FluidLibrary> FluidLibrary::load(const fs::path& folder) {
  auto files = readFiles(folder);
  if (!files) return files.error();
  FluidLibrary library;
  Digest digest;
  for (const auto& [name, bytes] : *files) {
    digest.add(name);
    digest.add(std::string_view("\0", 1));
    digest.add(bytes);
    if (!name.starts_with("reference/") || !name.ends_with(".toml")) continue;
    auto reference = parseReferenceFluid(name, bytes);
    if (!reference) return reference.error();
    reference->evidence = evidenceOf(*files, reference->file);
    library.references_.push_back(std::move(*reference));
  }
  library.digest_ = digest.finish();

  const auto catalogue = table(*files, "catalogue.csv", catalogueColumns());
  if (!catalogue) return catalogue.error();
  const auto cp0 = table(*files, "cp0.csv", cp0Columns());
  if (!cp0) return cp0.error();
  auto fluids = joinFluids(*catalogue, *cp0, library.references_);
  if (!fluids) return fluids.error();
  library.fluids_ = std::move(*fluids);

  const auto kij = table(*files, "kij.csv", interactionColumns());
  if (!kij) return kij.error();
  auto interactions = readInteractions(*kij, library.fluids_);
  if (!interactions) return interactions.error();
  library.interactions_ = std::move(*interactions);

  const auto blends = table(*files, "blends.csv", blendColumns());
  if (!blends) return blends.error();
  auto read = readBlends(*blends, library.fluids_);
  if (!read) return read.error();
  library.blends_ = std::move(*read);
  return library;
}

Result<fs::path> FluidLibrary::findFolder() {
  if (const char* chosen = std::getenv("HOLDFAST_FLUIDS"); chosen != nullptr && *chosen != '\0') {
    if (fs::exists(fs::path(chosen) / "catalogue.csv")) return fs::path(chosen);
    return Error{"HOLDFAST_FLUIDS names " + std::string(chosen) + ", where there is no catalogue.csv"};
  }
  // An installed program finds the data beside its own folder, wherever it was put.
  std::error_code unknown;
  const fs::path program = fs::read_symlink("/proc/self/exe", unknown);
  for (const fs::path& folder : {program.parent_path().parent_path() / HOLDFAST_FLUIDS_BESIDE,
                                 fs::path(HOLDFAST_FLUIDS_BUILD), fs::path(HOLDFAST_FLUIDS_INSTALLED)})
    if (fs::exists(folder / "catalogue.csv")) return folder;
  return Error{"the fluid data is not found; set HOLDFAST_FLUIDS to the folder that holds catalogue.csv"};
}

Result<const Fluid*> FluidLibrary::find(std::string_view name) const {
  const std::string wanted = folded(name);
  for (const Fluid& fluid : fluids_)
    for (const std::string& spelling : spellings(fluid, references_))
      if (folded(spelling) == wanted) return &fluid;
  std::vector<std::string> known;
  for (const Fluid& fluid : fluids_)
    for (std::string& spelling : spellings(fluid, references_)) known.push_back(std::move(spelling));
  const std::vector<std::string_view> choices(known.begin(), known.end());
  return Error{"unknown fluid \"" + std::string(name) + "\"" + suggestion(name, choices)};
}

const Blend* FluidLibrary::findBlend(std::string_view designation) const {
  const std::string wanted = folded(designation);
  for (const Blend& blend : blends_)
    if (folded(blend.designation) == wanted) return &blend;
  return nullptr;
}

BinaryInteraction FluidLibrary::interaction(const Fluid& first, const Fluid& second) const {
  const auto [low, high] = std::minmax(first.label(), second.label());
  const auto found = interactions_.find({low, high});
  if (found == interactions_.end()) return {0, "prediction", "none known: kij = 0"};
  return found->second;
}

}  // namespace holdfast::thermo
