#include <formsieve/table.hpp>

namespace formsieve::table {

std::optional<std::size_t> Table::find(const std::string& name) const {
  for (std::size_t i = 0; i < columns.size(); ++i)
    if (columns[i].name == name) return i;
  return std::nullopt;
}

}  // namespace formsieve::table
