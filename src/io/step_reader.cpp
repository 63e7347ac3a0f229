#include "io/step_reader.h"

#include "io/slab_reader.h"

namespace lagscape {

const std::vector<double>& StepReader::read(std::size_t file, std::size_t step, CellRange cells, ValueCounts& counts) {
  const ArchiveFile& part = plan_.files[file];
  if (!file_ || open_ != file) {
    file_.reset();
    file_.emplace(NcFile::open(part.path));
    layout_ = reopened(*file_, part.layout);
    open_ = file;
  }
  stored_.resize(cells.count * part.rules.bytes());
  values_.resize(cells.count);
  read_stored(*file_, layout_, plan_.map, plan_.panel.geometry.cols, cells, step, 1, part.rules.bytes(),
              stored_.data());
  part.rules.decode(stored_.data(), cells.count, values_.data(), counts);
  return values_;
}

}  // namespace lagscape
