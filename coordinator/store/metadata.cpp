// What a study is made of: recorded once, read when it goes on.
#include <algorithm>
#include <map>
#include <optional>
#include <string>
#include <utility>

#include "coordinator/store/store_impl.hpp"

namespace holdfast::coordinator {
namespace {

std::optional<std::string_view> unlessEmpty(const std::string& text) {
  return text.empty() ? std::nullopt : std::optional<std::string_view>(text);
}

void bindOptional(Statement& statement, int parameter, std::optional<std::string_view> text) {
  if (text)
    statement.bind(parameter, *text);
  else
    statement.bindNull(parameter);
}

StudyState studyStateOf(std::string_view name) {
  for (const StudyState state : {StudyState::running, StudyState::paused, StudyState::cancelled})
    if (name == nameOf(state)) return state;
  return StudyState::complete;
}

/// The fluids of a plan by the names it uses; fails if the library does not know one.
Result<std::map<std::string, const thermo::Fluid*>> fluidsOf(const v1::Plan& plan,
                                                             const thermo::FluidLibrary& library) {
  std::map<std::string, const thermo::Fluid*> fluids;
  for (const v1::PlannedCandidate& candidate : plan.candidates())
    for (const std::string& component : candidate.components()) {
      if (fluids.contains(component)) continue;
      const auto found = library.find(component);
      if (!found) return found.error();
      fluids[component] = *found;
    }
  return fluids;
}

void insertFluids(Connection& connection, const std::map<std::string, const thermo::Fluid*>& fluids) {
  // An earlier study may have recorded a fluid from older data: the latest stand.
  Statement insert(connection.handle(),
                   "INSERT OR REPLACE INTO fluid VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)");
  for (const auto& [used_name, fluid] : fluids) {
    bindOptional(insert, 1, unlessEmpty(fluid->designation));
    insert.bind(2, fluid->name);
    bindOptional(insert, 3, unlessEmpty(fluid->cas));
    insert.bind(4, fluid->M).bind(5, fluid->T_critical).bind(6, fluid->p_critical);
    insert.bind(7, fluid->acentric_factor);
    bindOptional(insert, 8, unlessEmpty(fluid->safety_class));
    insert.bind(9, fluid->gwp100);
    bindOptional(insert, 10, unlessEmpty(fluid->gwp_source));
    insert.bind(11, fluid->odp);
    bindOptional(insert, 12, unlessEmpty(fluid->caution));
    bindOptional(insert, 13, unlessEmpty(fluid->source));
    insert.run();
  }
}

void insertCandidates(Connection& connection, std::int64_t study, const v1::Plan& plan,
                      std::span<const CandidateFacts> facts) {
  Statement insert(connection.handle(), "INSERT INTO candidate VALUES (?, ?, ?, ?, ?)");
  Statement reference(connection.handle(),
                      "INSERT OR IGNORE INTO reference_used VALUES (?, ?, ?, ?, ?, ?, ?)");
  for (int c = 0; c < plan.candidates_size(); ++c) {
    const v1::PlannedCandidate& candidate = plan.candidates(c);
    const CandidateFacts& known = facts[static_cast<std::size_t>(c)];
    insert.bind(1, study).bind(2, std::int64_t{c}).bind(3, candidate.label());
    insert.bind(4, candidate.equation()).bind(5, known.data_kind).run();
    for (std::size_t i = 0; i < known.reference_used.size(); ++i) {
      const thermo::ReferenceUsed& used = known.reference_used[i];
      reference.bind(1, study).bind(2, std::int64_t{c});
      reference.bind(3, candidate.components(static_cast<int>(i))).bind(4, used.state);
      reference.bind(5, used.T).bind(6, used.h).bind(7, used.s).run();
    }
  }
}

void insertCompositions(Connection& connection, std::int64_t study, const v1::Plan& plan,
                        const std::map<std::string, const thermo::Fluid*>& fluids) {
  const plan::Points points(plan);
  Statement insert(connection.handle(), "INSERT INTO composition VALUES (?, ?, ?, ?, ?)");
  Statement part(connection.handle(), "INSERT INTO composition_part VALUES (?, ?, ?, ?, ?, ?)");
  std::int64_t id = 0;
  for (int c = 0; c < plan.candidates_size(); ++c) {
    const v1::PlannedCandidate& candidate = plan.candidates(c);
    const std::uint64_t compositions = points.compositionsOf(static_cast<std::uint32_t>(c));
    for (std::uint64_t k = 0; k < compositions; ++k, ++id) {
      const std::vector<double> z = points.moleFractions(static_cast<std::uint32_t>(c), k);
      double M = 0;
      for (std::size_t i = 0; i < z.size(); ++i) M += z[i] * candidate.molar_mass(static_cast<int>(i));
      std::optional<double> gwp100 = 0.0;
      for (std::size_t i = 0; i < z.size(); ++i) {
        const std::string& fluid = candidate.components(static_cast<int>(i));
        const double w = z[i] * candidate.molar_mass(static_cast<int>(i)) / M;
        part.bind(1, study).bind(2, id).bind(3, static_cast<std::int64_t>(i + 1)).bind(4, fluid);
        part.bind(5, z[i]).bind(6, w).run();
        if (z[i] == 0) continue;
        const std::optional<double>& gwp_of_part = fluids.at(fluid)->gwp100;
        gwp100 = gwp100 && gwp_of_part ? std::optional(*gwp100 + w * *gwp_of_part) : std::nullopt;
      }
      insert.bind(1, study).bind(2, id).bind(3, std::int64_t{c}).bind(4, M).bind(5, gwp100).run();
    }
  }
}

void insertQuantities(Connection& connection, std::int64_t study, const PointsTable& table) {
  Statement insert(connection.handle(), "INSERT INTO quantity VALUES (?, ?, ?, ?, ?)");
  const auto describe = [&](const DescribedColumn& column) {
    insert.bind(1, study).bind(2, column.name).bind(3, column.written_as);
    insert.bind(4, column.meaning).bind(5, column.unit).run();
  };
  for (const StoredColumn& column : table.stored()) describe(column);
  for (const DerivedColumn& column : table.derived()) describe(column);
}

void insertJobs(Connection& connection, std::int64_t study, const v1::Plan& plan) {
  Statement insert(connection.handle(),
                   "INSERT INTO job(study, id, first_point, points, state, attempts) "
                   "VALUES (?, ?, ?, ?, 'waiting', 0)");
  std::int64_t id = 0;
  for (std::uint64_t first = 0; first < plan.points(); first += plan.points_per_job(), ++id) {
    const std::uint64_t points = std::min<std::uint64_t>(plan.points_per_job(), plan.points() - first);
    insert.bind(1, study).bind(2, id).bind(3, static_cast<std::int64_t>(first));
    insert.bind(4, static_cast<std::int64_t>(points)).run();
  }
}

/// Fails if the store already uses a name that the study needs.
Status checkNames(Connection& connection, const v1::Plan& plan, const PointsTable& table) {
  Statement study(connection.handle(), "SELECT 1 FROM study WHERE name = ?");
  if (study.bind(1, plan.name()).row()) return Error{"the store has a study \"" + plan.name() + "\" already"};
  for (const std::string& name : {plan.name(), table.name()}) {
    Statement taken(connection.handle(), "SELECT 1 FROM sqlite_schema WHERE name = ? COLLATE NOCASE");
    if (taken.bind(1, name).row() || name.starts_with("sqlite_"))
      return Error{"a study of this store cannot be named \"" + plan.name() +
                   "\": the store itself uses the "
                   "name " +
                   name + "; give the study file another name"};
  }
  return success();
}

}  // namespace

Result<StudyRecord> Store::add(const v1::Plan& plan, std::string_view identity, std::string_view text,
                               std::string_view version, const thermo::FluidLibrary& library,
                               std::span<const CandidateFacts> facts) {
  if (facts.size() != static_cast<std::size_t>(plan.candidates_size()))
    return Error{"facts are known of " + std::to_string(facts.size()) + " candidates, the plan has " +
                 std::to_string(plan.candidates_size())};
  if (plan.points() == 0 || plan.points_per_job() == 0 || plan.points() != plan::Points(plan).count())
    return Error{"the plan of \"" + plan.name() + "\" does not count its points"};
  auto fluids = fluidsOf(plan, library);
  if (!fluids) return fluids.error();
  auto table = PointsTable::of(plan);
  if (!table) return table.error();
  return guarded([&]() -> Result<StudyRecord> {
    Connection& connection = impl_->connection;
    Transaction transaction(connection);
    if (Status names = checkNames(connection, plan, *table); !names) return names.error();
    const std::string packed = plan.SerializeAsString();
    Statement insert(
        connection.handle(),
        "INSERT INTO study(name, title, identity, text, version, created_utc, points, state, plan) "
        "VALUES (?, ?, ?, ?, ?, strftime('%Y-%m-%dT%H:%M:%fZ', 'now'), ?, 'running', ?)");
    insert.bind(1, plan.name()).bind(2, plan.title()).bind(3, identity).bind(4, text).bind(5, version);
    insert.bind(6, static_cast<std::int64_t>(plan.points())).bindBytes(7, packed).run();
    const std::int64_t study = sqlite3_last_insert_rowid(connection.handle());
    insertFluids(connection, *fluids);
    insertCandidates(connection, study, plan, facts);
    insertCompositions(connection, study, plan, *fluids);
    insertQuantities(connection, study, *table);
    insertJobs(connection, study, plan);
    connection.execute(table->createTable());
    connection.execute(table->createView(study));
    transaction.commit();
    impl_->keepLogBounded();
    StudyRecord record;
    record.id = study;
    record.name = plan.name();
    record.identity = identity;
    record.text = text;
    record.version = version;
    record.plan = plan;
    return record;
  });
}

Status Store::drop(std::string_view name) {
  return guarded([&]() -> Status {
    Connection& connection = impl_->connection;
    Transaction transaction(connection);
    Statement find(connection.handle(), "SELECT id FROM study WHERE name = ?");
    if (!find.bind(1, name).row()) return Error{"the store has no study \"" + std::string(name) + "\""};
    const std::int64_t study = find.integer(0);
    find.row();
    connection.execute("DROP VIEW " + named(name) + "; DROP TABLE " + named("points_" + std::string(name)));
    for (const char* table :
         {"quantity", "candidate", "reference_used", "composition", "composition_part", "job", "absence"})
      connection.execute("DELETE FROM " + std::string(table) + " WHERE study = " + std::to_string(study));
    connection.execute("DELETE FROM study WHERE id = " + std::to_string(study));
    connection.execute(
        "DELETE FROM fluid WHERE coalesce(designation, name) NOT IN (SELECT fluid FROM composition_part)");
    transaction.commit();
    impl_->studies.erase(study);
    impl_->keepLogBounded();
    return success();
  });
}

Result<std::vector<StudyRecord>> Store::studies() {
  return guarded([&]() -> Result<std::vector<StudyRecord>> {
    std::vector<StudyRecord> records;
    Statement select(
        impl_->connection.handle(),
        "SELECT id, name, identity, text, version, state, plan, (SELECT coalesce(sum(points), 0) "
        "FROM job WHERE study = study.id AND state = 'committed') FROM study ORDER BY id");
    while (select.row()) {
      StudyRecord record;
      record.id = select.integer(0);
      record.name = select.text(1);
      record.identity = select.text(2);
      record.text = select.text(3);
      record.version = select.text(4);
      record.state = studyStateOf(select.text(5));
      const std::span<const char> packed = select.bytes(6);
      if (!record.plan.ParseFromArray(packed.data(), static_cast<int>(packed.size())))
        return Error{"the plan of study \"" + record.name + "\" in the store cannot be read"};
      record.points_done = static_cast<std::uint64_t>(select.integer(7));
      records.push_back(std::move(record));
    }
    return records;
  });
}

Result<LandingStudy*> Store::Impl::landing(std::int64_t study) {
  auto& slot = studies[study];
  if (slot) return slot.get();
  Statement select(connection.handle(), "SELECT plan FROM study WHERE id = ?");
  v1::Plan plan;
  if (!select.bind(1, study).row()) return Error{"the store has no study of number " + std::to_string(study)};
  const std::span<const char> packed = select.bytes(0);
  if (!plan.ParseFromArray(packed.data(), static_cast<int>(packed.size())))
    return Error{"the plan of study number " + std::to_string(study) + " in the store cannot be read"};
  auto table = PointsTable::of(plan);
  if (!table) return table.error();
  slot = std::make_unique<LandingStudy>(std::move(plan), std::move(*table));
  return slot.get();
}

}  // namespace holdfast::coordinator
