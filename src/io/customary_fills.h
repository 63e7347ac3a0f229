#pragma once
#include <cstddef>
#include <limits>
#include <vector>

namespace lagscape {

/// Looks through the values of a variable for numbers that customarily stand for "missing" although the file does not
/// say so: -9999, -32768, 1e20 and their like. Which numbers these are is common practice, without a published source.
class CustomaryFills {
 public:
  /// scale, offset: packing of the stored values, since a fill may be written packed or not. `floats`: stored as such.
  CustomaryFills(double scale, double offset, bool floats);
  /// Looks at one value as it is read; NaN is passed over.
  void add(double value);

  struct Suspect {
    double value = 0;  ///< what to write in missing_values of a job
    std::size_t count = 0;
  };
  /// Those seen that lie far from all the other values: farther than their range, or below 0 where nothing else is.
  [[nodiscard]] std::vector<Suspect> suspects() const;
  /// Smallest and largest of the other values; low > high if there are none.
  [[nodiscard]] double low() const { return low_; }
  [[nodiscard]] double high() const { return high_; }

 private:
  struct Candidate {
    double held = 0;  ///< as it is read
    double shown = 0;
    std::size_t count = 0;
  };
  std::vector<Candidate> candidates_;  ///< ascending
  double low_ = std::numeric_limits<double>::infinity(), high_ = -low_;
};

}  // namespace lagscape
