#pragma once
#include <cstdint>
#include <string>
#include <variant>
#include <vector>

namespace lagscape {

/// A netCDF attribute as we carry it: text, integers (written as NC_INT) or doubles.
struct Attribute {
  std::string name;
  std::variant<std::string, std::vector<std::int64_t>, std::vector<double>> value;
};
using Attributes = std::vector<Attribute>;

}  // namespace lagscape
