#include "io/value_list.hpp"

#include "io/csv.hpp"
#include "io/small_file.hpp"

namespace stanchion {
namespace {

bool read_line(CsvReader& csv, const std::vector<std::string_view>& fields, ListedValue& listed) {
  if (!csv.real(fields[0], "a value", listed.value)) return false;
  if (!fields[1].empty()) {
    double tolerance = 0;
    if (!csv.real(fields[1], "a tolerance", tolerance)) return false;
    if (tolerance < 0) {
      csv.fail("negative-tolerance", "the tolerance is negative",
               "give the half width in the unit of the values");
      return false;
    }
    listed.tolerance = tolerance;
  }
  listed.label = fields[2];
  listed.line = csv.line();
  return true;
}

Result<std::vector<ListedValue>> parse(std::string_view text, const std::string& path) {
  CsvReader csv(text, path, {{"value", true}, {"tolerance", false}, {"label", false}});
  std::vector<std::string_view> fields;
  std::vector<ListedValue> values;
  while (csv.next(fields)) {
    ListedValue listed;
    if (!read_line(csv, fields, listed)) break;
    values.push_back(std::move(listed));
  }
  if (!csv.status().ok()) return csv.status();
  if (values.empty()) {
    return Status::bad_input("empty-file", "the list holds no values", path, "list at least one value");
  }
  return values;
}

}  // namespace

Result<std::vector<ListedValue>> read_values(const std::string& path) {
  return with_small_file(path, [&](std::string_view text) { return parse(text, path); });
}

}  // namespace stanchion
