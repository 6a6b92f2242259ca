// The table of a study's points and the view of it for people: which columns, in which order, from where.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "holdfast.pb.h"
#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// A column as the store's table `quantity` describes it.
struct DescribedColumn {
  std::string name;        ///< in the store
  std::string written_as;  ///< in the study
  std::string meaning;
  std::string unit;  ///< UDUNITS-2 text
};

/// A REAL column of the points table. An axis that is collected as well is stored once, as the axis.
struct StoredColumn : DescribedColumn {
  enum class Source { axis, collected };
  Source source = Source::axis;
  int index = 0;  ///< into Plan.axes or Plan.columns
};

/// A column that only the view has: it follows from others.
struct DerivedColumn : DescribedColumn {
  std::string expression;  ///< SQL over the points table's columns
};

class PointsTable {
 public:
  /// Fails if a column of the plan cannot be named in the store.
  static Result<PointsTable> of(const v1::Plan& plan);

  const std::vector<StoredColumn>& stored() const { return stored_; }
  const std::vector<DerivedColumn>& derived() const { return derived_; }
  const std::string& name() const { return name_; }  ///< points_<study>

  std::string createTable() const;
  /// The table of an image whose records fit: equal types in equal order, short names.
  std::string createImageTable() const;
  std::string createView(std::int64_t study) const;

 private:
  void derive(bool molar);
  std::string study_, name_;
  std::vector<StoredColumn> stored_;
  std::vector<DerivedColumn> derived_;
};

}  // namespace holdfast::coordinator
