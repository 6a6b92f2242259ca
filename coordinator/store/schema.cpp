#include "coordinator/store/schema.hpp"

#include <array>
#include <string>

#include "thermo/state.hpp"

namespace holdfast::coordinator {
namespace {

// SQLite keeps the comments: `.schema` in a shell explains the store. All numbers are SI.
constexpr std::array kTables = {
    R"(CREATE TABLE store (
  opened INTEGER NOT NULL  -- how often a coordinator has opened this store
) STRICT)",
    R"(CREATE TABLE study (
  id INTEGER PRIMARY KEY AUTOINCREMENT,  -- what `study` means in the other tables; never used again
  name TEXT NOT NULL UNIQUE,             -- its points are in points_<name>, and for people in the view <name>
  title TEXT NOT NULL,
  identity TEXT NOT NULL,                -- digest of the plan, the fluid data and the build
  text TEXT NOT NULL,                    -- the study file
  version TEXT NOT NULL,                 -- of the program that planned it
  created_utc TEXT NOT NULL,
  points INTEGER NOT NULL,
  state TEXT NOT NULL CHECK (state IN ('running', 'paused', 'complete', 'cancelled')),
  plan BLOB NOT NULL                     -- the plan as the programs exchange it (holdfast.v1.Plan)
) STRICT)",
    R"(CREATE TABLE quantity (
  study INTEGER NOT NULL,
  column_name TEXT NOT NULL,  -- in points_<study> or, where it follows from others, in the view alone
  written_as TEXT NOT NULL,   -- in the study, or how it follows
  meaning TEXT NOT NULL,
  unit TEXT NOT NULL,         -- as UDUNITS-2 reads it
  UNIQUE (study, column_name)
) STRICT)",
    R"(CREATE TABLE fluid (
  designation TEXT,         -- ISO 817; NULL where there is none
  name TEXT PRIMARY KEY NOT NULL,
  cas TEXT,
  M REAL NOT NULL,          -- kg/mol
  T_c REAL NOT NULL,        -- K; of the catalogue, used by the cubic equations
  p_c REAL NOT NULL,        -- Pa; likewise
  acentric_factor REAL,     -- NULL: not known, no cubic equation
  safety_class TEXT,        -- ISO 817; local codes and licensed practice decide
  gwp100 REAL,              -- kg CO2 a kg; NULL: not assessed
  gwp_source TEXT,
  odp REAL,
  caution TEXT,
  source TEXT
) STRICT)",
    R"(CREATE TABLE candidate (
  study INTEGER NOT NULL,
  id INTEGER NOT NULL,      -- counted from 0
  label TEXT NOT NULL,
  equation TEXT NOT NULL,
  data_kind TEXT NOT NULL,  -- where the data of pairs of components come from
  PRIMARY KEY (study, id)
) STRICT)",
    R"(CREATE TABLE reference_used (
  study INTEGER NOT NULL,
  candidate INTEGER NOT NULL,
  fluid TEXT NOT NULL,
  state TEXT NOT NULL,  -- where h and s are fixed
  T REAL NOT NULL,      -- K
  h REAL NOT NULL,      -- J/kg
  s REAL NOT NULL,      -- J/(kg K)
  UNIQUE (study, candidate, fluid)
) STRICT)",
    R"(CREATE TABLE composition (
  study INTEGER NOT NULL,
  id INTEGER NOT NULL,         -- counted from 0 through all candidates
  candidate INTEGER NOT NULL,  -- candidate.id
  M REAL NOT NULL,             -- kg/mol
  gwp100 REAL,                 -- by mass; NULL where a part was not assessed
  PRIMARY KEY (study, id)
) STRICT, WITHOUT ROWID)",
    R"(CREATE TABLE composition_part (
  study INTEGER NOT NULL,
  composition INTEGER NOT NULL,  -- composition.id
  ordinal INTEGER NOT NULL,      -- counted from 1: the order of lnphi_1..
  fluid TEXT NOT NULL,           -- fluid.designation, or fluid.name where there is none
  z REAL NOT NULL,               -- mole fraction
  w REAL NOT NULL,               -- mass fraction
  PRIMARY KEY (study, composition, ordinal)
) STRICT, WITHOUT ROWID)",
    R"(CREATE TABLE job (
  study INTEGER NOT NULL,
  id INTEGER NOT NULL,
  first_point INTEGER NOT NULL,
  points INTEGER NOT NULL,
  state TEXT NOT NULL CHECK (state IN ('waiting', 'leased', 'returned', 'committed', 'failed')),
  attempts INTEGER NOT NULL,  -- errors so far
  worker TEXT,
  started_utc TEXT,
  finished_utc TEXT,
  failure TEXT,               -- why it was given up
  PRIMARY KEY (study, id)
) STRICT, WITHOUT ROWID)",
    R"(CREATE TABLE phase (
  code INTEGER PRIMARY KEY,
  name TEXT NOT NULL
) STRICT)",
    R"(CREATE TABLE outcome (
  code INTEGER PRIMARY KEY,
  name TEXT NOT NULL,
  meaning TEXT NOT NULL
) STRICT)",
    R"(CREATE TABLE absence (
  study INTEGER NOT NULL,
  candidate INTEGER NOT NULL,  -- candidate.id
  phase INTEGER NOT NULL,      -- phase.code; 0: not known
  column_name TEXT NOT NULL,
  reason TEXT NOT NULL,        -- why the column is NULL at computed points of this candidate and phase
  PRIMARY KEY (study, candidate, phase, column_name, reason)
) STRICT, WITHOUT ROWID)",
};

}  // namespace

void createSchema(Connection& connection) {
  connection.execute("PRAGMA application_id = " + std::to_string(kApplicationId));
  connection.execute("PRAGMA user_version = " + std::to_string(kStoreVersion));
  for (const char* table : kTables) connection.execute(table);
  connection.execute("INSERT INTO store VALUES (0)");

  Statement phase(connection.handle(), "INSERT INTO phase VALUES (?, ?)");
  for (const thermo::Phase code :
       {thermo::Phase::liquid, thermo::Phase::vapour, thermo::Phase::two_phase, thermo::Phase::supercritical})
    phase.bind(1, static_cast<std::int64_t>(code)).bind(2, thermo::nameOf(code)).run();
  Statement outcome(connection.handle(), "INSERT INTO outcome VALUES (?, ?, ?)");
  for (int code = 0; code < thermo::kOutcomes; ++code) {
    const auto which = static_cast<thermo::Outcome>(code);
    outcome.bind(1, std::int64_t{code})
        .bind(2, thermo::nameOf(which))
        .bind(3, thermo::meaningOf(which))
        .run();
  }
}

}  // namespace holdfast::coordinator
