#include "lagscape/measures/measure.h"

#include <algorithm>

#include "measures/groups.h"

namespace lagscape {

const std::vector<Measure>& measure_catalog() {
  static const std::vector<Measure> catalog = [] {
    std::vector<Measure> all;
    for (const auto& group :
         {record_measures, memory_measures, effective_size_measures, trend_measures, cube_measures}) {
      std::ranges::move(group(), std::back_inserter(all));
    }
    return all;
  }();
  return catalog;
}

const Measure* find_measure(std::string_view name) {
  const auto& all = measure_catalog();
  const auto found = std::ranges::find(all, name, &Measure::name);
  return found == all.end() ? nullptr : &*found;
}

std::string_view group_name(MapGroup group) {
  switch (group) {
    case MapGroup::record:
      return "record";
    case MapGroup::memory:
      return "memory";
    case MapGroup::effective_size:
      return "effective-size";
    case MapGroup::trend:
      return "trend";
    case MapGroup::cubes:
      return "cubes";
  }
  return "";
}

std::vector<std::string> map_words() {
  std::vector<std::string> words = {"standard", "all"};
  for (const MapGroup group : {MapGroup::record, MapGroup::memory, MapGroup::effective_size, MapGroup::trend}) {
    words.emplace_back(group_name(group));
  }
  for (const Measure& measure : measure_catalog()) {
    if (measure.axis == LayerAxis::none) words.emplace_back(measure.name);
  }
  return words;
}

std::vector<std::string> cube_words() {
  std::vector<std::string> words;
  for (const Measure& measure : measure_catalog()) {
    if (measure.axis != LayerAxis::none) words.emplace_back(measure.name);
  }
  return words;
}

}  // namespace lagscape
