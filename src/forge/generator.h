#pragma once
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "forge/random.h"
#include "forge/recipe.h"

namespace lagscape {

/// Makes the values of a run of cells, one time step after the other. A value depends on the recipe, its cell and its
/// step, never on the run it is made in. Memory: as many past values a cell as its process has coefficients (all of
/// them with long memory) and a few numbers more; it does not grow with the number of steps otherwise.
class Generator {
 public:
  /// The recipe must outlive the generator. Cells [first, first + count) of the grid.
  Generator(const Recipe& recipe, std::size_t variable, std::size_t first, std::size_t count);
  /// Values of the next step, one a cell; NaN where missing. Not to be called more often than the recipe has steps.
  void next(std::span<double> out);
  /// Missing values so far, by cell.
  [[nodiscard]] const std::vector<std::size_t>& missing() const noexcept { return missing_; }

 private:
  /// The cells of one patch: what they share, and what each keeps.
  struct Share {
    const Patch* patch;
    Predictor predictor;
    std::size_t depth = 0;                  ///< past values kept a cell
    std::vector<std::size_t> cells;         ///< counted from the first cell of the run
    std::vector<double> past;               ///< ring of `depth` steps, cells contiguous
    std::vector<double> now, spare;         ///< noise of this step, and of the next one (normals come in pairs)
    std::vector<std::size_t> gaps_to_come;  ///< random gaps still to be placed
    std::vector<std::size_t> block_first;
    std::size_t block_steps = 0;
  };
  void start_gaps(Share& share);
  void draw_noise(Share& share);
  void write_values(Share& share, std::span<double> out);
  [[nodiscard]] bool is_gap(Share& share, std::size_t index);
  [[nodiscard]] double signal(const Patch& patch) const;

  const Recipe& recipe_;
  RandomNumbers random_;
  std::size_t first_, step_ = 0;
  int month_ = 1;  ///< of this step
  std::vector<Share> shares_;
  std::vector<std::size_t> missing_;
};

}  // namespace lagscape
