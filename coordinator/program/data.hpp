// The fluid data of a program.
#pragma once

#include <memory>

#include "thermo/fluids/library.hpp"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// Finds and loads it. The Error says where it was looked for, or which file, line and field is broken.
inline Result<std::shared_ptr<const thermo::FluidLibrary>> loadData() {
  const auto folder = thermo::FluidLibrary::findFolder();
  if (!folder.ok()) return folder.error();
  auto loaded = thermo::FluidLibrary::load(*folder);
  if (!loaded.ok()) return loaded.error();
  return std::make_shared<const thermo::FluidLibrary>(std::move(*loaded));
}

}  // namespace holdfast::coordinator
