// The tables that every store has.
#pragma once

#include <cstdint>

#include "coordinator/store/sqlite.hpp"

namespace holdfast::coordinator {

/// PRAGMA application_id of a store: "HldF".
inline constexpr std::int64_t kApplicationId = 0x486C6446;
/// PRAGMA user_version: the version of the tables' layout. A store of a later one is refused.
inline constexpr std::int64_t kStoreVersion = 1;

/// Makes all tables in an empty database and fills `phase` and `outcome`. Inside the caller's transaction.
void createSchema(Connection& connection);

}  // namespace holdfast::coordinator
