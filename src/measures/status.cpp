#include "measures/status.h"

#include <array>

#include "lagscape/measures/measure.h"

namespace lagscape {
namespace {

constexpr std::array kStatusBits = {
    StatusBit{kNoData, "no_data", "no data", "The cell holds no valid value (sea on a land map, say).", true},
    StatusBit{kTooFew, "too_few_values", "too few values",
              "Fewer valid values, or a smaller share of them, than prepare.min_count and prepare.min_share ask for "
              "(or than the "
              "statistics need: 21, and 10 more than the parameters of the fit).",
              true},
    StatusBit{kConstant, "constant", "constant",
              "All values are equal, or season and trend explain them wholly: there is no variability left to "
              "describe. A slope of "
              "0 is given for a constant record.",
              true},
    StatusBit{kSeasonIncomplete, "season_incomplete", "season incomplete",
              "The gaps leave fewer than two seasons with two values or more, or make the terms of the fit "
              "indistinguishable.",
              true},
    StatusBit{
        kNearUnitRoot, "near_unit_root", "near unit root",
        "Memory is so strong for this record that its fit is at the edge of stationarity: times and effective sizes "
        "are bounds rather than estimates, and trend tests are at their least reliable.",
        false},
    StatusBit{kBeyondLagRange, "beyond_lag_range", "beyond lag range",
              "A crossing or sum was not reached within half the record, or within the lags that the gaps leave enough "
              "pairs for: "
              "that map is missing there (crossings) or a lower bound (sums).",
              false},
    StatusBit{kManyTies, "many_ties", "many ties",
              "More than half of the values are one and the same value (zeros of rainfall, say): normal theory is a "
              "poor guide.",
              false},
    StatusBit{kManyGaps, "many_gaps", "many gaps",
              "More than a fifth of the steps are missing, or too few stretches without gaps are left for an "
              "autoregression; estimates are less certain or missing.",
              false},
    StatusBit{kShortRecord, "short_record", "short record",
              "Less than ten years from the first to the last value: a trend over so short a time says little.", false},
};

constexpr std::array kTrendClasses = {
    TrendClass{0, "not_established", "not established"},
    TrendClass{1, "rising", "rising"},
    TrendClass{2, "falling", "falling"},
};

}  // namespace

std::span<const StatusBit> status_bits() { return kStatusBits; }
std::span<const TrendClass> trend_classes() { return kTrendClasses; }

}  // namespace lagscape
