#pragma once
#include <vector>

#include "lagscape/measures/measure.h"

namespace lagscape {

// The declarations, one function a group; measure.cpp puts them together in this order.
std::vector<Measure> record_measures();
std::vector<Measure> memory_measures();
std::vector<Measure> effective_size_measures();
std::vector<Measure> trend_measures();
std::vector<Measure> cube_measures();

/// Where a formula is everybody's.
inline constexpr std::string_view kCommonPractice = "common practice, no published source";

}  // namespace lagscape
