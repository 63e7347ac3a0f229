#pragma once
#include <cstddef>
#include <memory>
#include <string>
#include <vector>

#include "io/grid_geometry.h"
#include "io/value_rules.h"
#include "io/variable_layout.h"
#include "lagscape/grid/panel.h"

namespace lagscape {

/// Time steps that are neighbours in a file and in a band.
struct StepRun {
  std::size_t file_step = 0, row = 0, count = 0;  ///< row: among the rows of this file in a band
};

/// One file of an archive: how to find its values and what they mean. It is open only while it is read.
struct ArchiveFile {
  std::string path;
  VariableLayout layout;
  ValueRules rules;
  std::vector<StepRun> runs;
  std::size_t rows = 0;  ///< stored steps kept in a band
};

/// Where a step of the axis is stored.
struct Holder {
  std::size_t file = 0, row = 0;
};

/// Everything about an archive but its values; shared by the source and its bands.
struct ArchivePlan {
  Panel panel;
  CellMap map;
  std::vector<unsigned char> excluded;
  std::vector<ArchiveFile> files;
  std::vector<Holder> holders;  ///< of all steps, one after the other
  std::vector<std::size_t>
      first_holder;  ///< per step of the axis, and one past the end; none: missing, several: their mean
};

/// The variable of an opened file again: ids of groups change from one opening to the next.
[[nodiscard]] VariableLayout reopened(const NcFile& file, const VariableLayout& layout);

}  // namespace lagscape
