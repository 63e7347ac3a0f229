#pragma once
#include <cstdint>

namespace lagscape {

// Bits of the status map; names and meanings in status.cpp.
inline constexpr std::int16_t kNoData = 1, kTooFew = 2, kConstant = 4, kSeasonIncomplete = 8, kNearUnitRoot = 16,
                              kBeyondLagRange = 32, kManyTies = 64, kManyGaps = 128, kShortRecord = 256;

}  // namespace lagscape
