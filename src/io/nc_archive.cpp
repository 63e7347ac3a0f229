#include "io/nc_archive.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <filesystem>
#include <numeric>
#include <utility>

#include "io/archive_band.h"
#include "io/archive_plan.h"
#include "io/mask_file.h"
#include "io/step_reader.h"
#include "io/time_bounds.h"
#include "io/time_decode.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

using Notes = std::vector<std::string>;

void add_note(Notes& notes, const std::string& note) {
  if (std::find(notes.begin(), notes.end(), note) == notes.end()) notes.push_back(note);
}
void add_notes(Notes& notes, const Notes& more) {
  for (const std::string& note : more) add_note(notes, note);
}

std::string file_name(const std::string& path) { return std::filesystem::path(path).filename().string(); }

std::string place_of(const NcFile& file, const VariableLayout& layout) {
  return fmt::format("file: {}, variable: {}", file.path(), layout.variable.path);
}

// ---- describing -----------------------------------------------------------------------------------------------------

std::string filter_words(const NcVariable& variable) {
  int shuffle = 0, deflate = 0, level = 0;
  if (nc_inq_var_deflate(variable.group, variable.id, &shuffle, &deflate, &level) != NC_NOERR) return {};
  std::string words = deflate != 0 ? fmt::format(", deflate {}", level) : "";
  if (shuffle != 0) words += deflate != 0 ? " + shuffle" : ", shuffle";
  return words;
}

std::string storage_words(const NcFile& file, const NcVariable& variable) {
  int storage = NC_CONTIGUOUS;
  std::vector<std::size_t> chunk(variable.dims.size() + 1);
  std::string kind = file.kind();
  if (kind.starts_with("CDF") || nc_inq_var_chunking(variable.group, variable.id, &storage, chunk.data()) != NC_NOERR)
    return kind;
  if (storage != NC_CHUNKED) return kind + ", contiguous";
  std::vector<std::string> sizes;
  for (std::size_t i = 0; i < variable.dims.size(); ++i) sizes.push_back(std::to_string(chunk[i]));
  return fmt::format("{}, chunks {}{}", kind, join(sizes, " x "), filter_words(variable));
}

std::string source_line(const std::string& path, const FileTimes& times) {
  const auto [low, high] = std::minmax_element(times.times.begin(), times.times.end());
  std::error_code failed;
  const auto bytes = std::filesystem::file_size(path, failed);
  const std::string span = times.times.empty() ? "no steps"
                                               : fmt::format("steps {} to {}", iso_text(times.calendar, *low),
                                                             iso_text(times.calendar, *high));
  return fmt::format("{}, {} bytes, {}", file_name(path), failed ? 0 : bytes, span);
}

Attributes worth_keeping(const Attributes& global) {
  constexpr std::array<std::string_view, 16> kKept = {
      "title",          "institution", "source",  "references",       "comment", "creator_name",
      "creator_email",  "creator_url", "license", "naming_authority", "id",      "product_version",
      "publisher_name", "project",     "doi",     "acknowledgement"};
  Attributes kept;
  for (const Attribute& one : global)
    if (std::find(kKept.begin(), kKept.end(), one.name) != kKept.end()) kept.push_back(one);
  return kept;
}

void describe_panel(const NcFile& file, const VariableLayout& layout, Panel& panel) {
  const Attributes attributes = file.attributes(layout.variable), global = file.attributes(file.id(), NC_GLOBAL);
  panel.variable = layout.variable.name();
  panel.long_name = text_attribute(attributes, "long_name");
  panel.standard_name = text_attribute(attributes, "standard_name");
  panel.units = text_attribute(attributes, "units");
  panel.input_history = text_attribute(global, "history");
  panel.input_attributes = worth_keeping(global);
  panel.storage = storage_words(file, layout.variable);
}

// ---- time -----------------------------------------------------------------------------------------------------------

[[noreturn]] void refuse_timeless(const NcFile& file, const VariableLayout& layout) {
  throw Error(
      ErrorKind::input,
      fmt::format("the variable has no time axis: its dimensions are {}", describe_dims(layout.variable)),
      place_of(file, layout),
      "choose a variable with a time dimension and a time coordinate (units such as \"days since 1981-01-01\")");
}

std::vector<double> time_values(const NcFile& file, const NcVariable& time) {
  if (time.type == NC_CHAR || time.type == NC_STRING || time.dims.size() > 1)
    throw Error(ErrorKind::input, "the time coordinate is no list of numbers",
                fmt::format("file: {}, variable: {}", file.path(), time.path),
                "give each step one number, counted from a date");
  std::vector<double> values = file.doubles(time);
  const Attributes attributes = file.attributes(time);
  const auto scale = number_attribute(attributes, "scale_factor"), offset = number_attribute(attributes, "add_offset");
  for (double& value : values) value = value * (scale.empty() ? 1 : scale[0]) + (offset.empty() ? 0 : offset[0]);
  return values;
}

FileTimes read_times(const NcFile& file, const VariableLayout& layout, const InputRequest& request, Notes& notes) {
  if (!layout.has_time()) refuse_timeless(file, layout);
  TimeText text;
  std::vector<double> values;
  std::string name;
  if (layout.time) {
    const Attributes attributes = file.attributes(*layout.time);
    text = {text_attribute(attributes, "units"), text_attribute(attributes, "calendar")};
    values = time_values(file, *layout.time);
    name = layout.time->path;
  } else {
    name = layout.variable.dims[*layout.position(DimRole::time)].name;
    if (!request.time || !request.time->unit)
      throw Error(
          ErrorKind::input, fmt::format("the time dimension '{}' has no coordinate, so the dates are unknown", name),
          place_of(file, layout),
          "say in [input] from when and in which unit to count its steps: time = { unit = \"days since 1981-01-01\" }");
    values.resize(layout.length(DimRole::time));
    std::iota(values.begin(), values.end(), 0.0);
    add_note(notes,
             fmt::format("steps of the time dimension '{}' are counted from 0 in '{}'", name, *request.time->unit));
  }
  if (request.time && request.time->unit) text.units = *request.time->unit;
  if (request.time && request.time->calendar) text.calendar = *request.time->calendar;
  FileTimes times = decode_times(file.path(), name, values, text, notes);
  if (layout.time) read_middles(file, *layout.time, text, times, notes);
  return times;
}

std::optional<TimeStep> given_step(const InputRequest& request) {
  if (!request.time || !request.time->step) return std::nullopt;
  if (const auto step = parse_duration(*request.time->step)) return step;
  throw Error(ErrorKind::job, fmt::format("step '{}' is not an ISO 8601 duration", *request.time->step), "[input] time",
              "write for example time = { step = \"P1M\" }");
}

// ---- joining --------------------------------------------------------------------------------------------------------

// Keeps the stored steps that fall on the axis; `mean` keeps every holder of a step, otherwise the first one.
void place_steps(const JoinedAxis& joined, DuplicateRule rule, ArchivePlan& plan) {
  struct Kept {
    std::size_t step;
    Holder holder;
  };
  const std::size_t steps = joined.axis.size();
  std::vector<Kept> kept;
  plan.first_holder.assign(steps + 1, 0);
  for (std::size_t f = 0; f < plan.files.size(); ++f) {
    ArchiveFile& file = plan.files[f];
    for (std::size_t s = 0; s < joined.axis_step[f].size(); ++s) {
      if (joined.axis_step[f][s] < 0) continue;
      const auto step = static_cast<std::size_t>(joined.axis_step[f][s]);
      if (rule != DuplicateRule::mean && plan.first_holder[step + 1] > 0) continue;
      ++plan.first_holder[step + 1];
      if (!file.runs.empty() && file.runs.back().file_step + file.runs.back().count == s)
        ++file.runs.back().count;
      else
        file.runs.push_back({s, file.rows, 1});
      kept.push_back({step, {f, file.rows++}});
    }
  }
  std::partial_sum(plan.first_holder.begin(), plan.first_holder.end(), plan.first_holder.begin());
  plan.holders.resize(kept.size());
  std::vector<std::size_t> next = plan.first_holder;
  for (const Kept& one : kept) plan.holders[next[one.step]++] = one.holder;
}

[[noreturn]] void refuse_overlap(const ArchivePlan& plan, const Overlap& overlap, std::size_t cell, double a,
                                 double b) {
  const std::string first = plan.files[overlap.file_a].path, other = plan.files[overlap.file_b].path;
  const char* const remedy =
      overlap.file_a == overlap.file_b ? "correct the times in the file" : "leave out one of the files";
  throw Error(ErrorKind::input,
              fmt::format("{} is stored twice with different values: {} and {} at {}",
                          plan.panel.axis.label(overlap.axis_step), std::isnan(a) ? "missing" : number_text(a),
                          std::isnan(b) ? "missing" : number_text(b), plan.panel.geometry.describe_cell(cell)),
              fmt::format("files: {} (time step {}) and {} (time step {}), variable: {}", first, overlap.step_a + 1,
                          other, overlap.step_b + 1, plan.panel.variable),
              fmt::format("{}; or add to [input] of the job: duplicates = \"first\" (or \"mean\")", remedy));
}

void compare_overlaps(const ArchivePlan& plan, std::vector<Overlap> overlaps) {
  std::sort(overlaps.begin(), overlaps.end(), [](const Overlap& a, const Overlap& b) {
    return std::tuple(a.file_a, a.file_b, a.axis_step) < std::tuple(b.file_a, b.file_b, b.axis_step);
  });
  StepReader first(plan), other(plan);
  const CellRange all{0, plan.panel.geometry.cells()};
  ValueCounts ignored;
  for (const Overlap& one : overlaps) {
    const std::vector<double>& a = first.read(one.file_a, one.step_a, all, ignored);
    const std::vector<double>& b = other.read(one.file_b, one.step_b, all, ignored);
    for (std::size_t cell = 0; cell < a.size(); ++cell) {
      const bool same = a[cell] == b[cell] || (std::isnan(a[cell]) && std::isnan(b[cell]));
      if (!same) refuse_overlap(plan, one, cell, a[cell], b[cell]);
    }
  }
}

void settle_overlaps(const ArchivePlan& plan, const JoinedAxis& joined, DuplicateRule rule, Notes& notes) {
  if (joined.overlaps.empty()) return;
  if (rule == DuplicateRule::refuse) compare_overlaps(plan, joined.overlaps);
  const char* const done = rule == DuplicateRule::refuse  ? "the values are the same, one copy is used"
                           : rule == DuplicateRule::first ? "the first copy is used"
                                                          : "their mean is used";
  notes.push_back(fmt::format("{} stored step{} fall on a step that is already there: {}", joined.overlaps.size(),
                              joined.overlaps.size() == 1 ? "" : "s", done));
}

// ---- opening --------------------------------------------------------------------------------------------------------

/// Collects what each file says, checking it against the first.
class ArchiveOpener {
 public:
  explicit ArchiveOpener(const InputRequest& request) : request_(request), plan_(std::make_shared<ArchivePlan>()) {}

  std::shared_ptr<const ArchivePlan> open() {
    if (request_.files.empty())
      throw Error(ErrorKind::job, "no input files are named", "[input] files", "name at least one file");
    for (const std::string& path : request_.files) add(path);
    Panel& panel = plan_->panel;
    const auto stamps = use_middles(times_, panel.notes);
    JoinedAxis joined = join_times(times_, given_step(request_), request_.period);
    note_moved_stamps(times_, stamps, joined.axis, panel.notes);
    add_notes(panel.notes, joined.notes);
    panel.axis = joined.axis;
    panel.steps_present = joined.steps_present;
    arrange_cells();
    place_steps(joined, request_.duplicates, *plan_);
    settle_overlaps(*plan_, joined, request_.duplicates, panel.notes);
    exclude_masked();
    panel.stored_bytes_per_value = 1;
    for (const ArchiveFile& file : plan_->files)
      panel.stored_bytes_per_value = std::max(panel.stored_bytes_per_value, file.rules.bytes());
    return plan_;
  }

 private:
  void add(const std::string& path) {
    const NcFile file = NcFile::open(path);
    ArchiveFile part;
    part.path = path;
    part.layout = find_layout(file, request_.variable, request_.select);
    Notes notes = part.layout.notes;
    times_.push_back(read_times(file, part.layout, request_, notes));
    part.rules = read_value_rules(file, part.layout.variable, request_, notes);
    Geometry geometry = read_geometry(file, part.layout, notes);
    const std::string units = text_attribute(file.attributes(part.layout.variable), "units");
    Panel& panel = plan_->panel;
    if (plan_->files.empty()) {
      describe_panel(file, part.layout, panel);
      geometry_ = std::move(geometry);
    } else {
      require_same_geometry(geometry_, plan_->files.front().path, geometry, path);
      if (units != panel.units)
        throw Error(ErrorKind::input, fmt::format("the files state different units: '{}' and '{}'", panel.units, units),
                    fmt::format("files: {} and {}, variable: {}", plan_->files.front().path, path, panel.variable),
                    "bring the files to one unit, or correct the attribute");
    }
    add_notes(panel.notes, notes);
    panel.sources.push_back(source_line(path, times_.back()));
    plan_->files.push_back(std::move(part));
  }

  void arrange_cells() {
    Arrangement arranged = arrange(geometry_, request_.box, request_.longitude, plan_->panel.notes);
    plan_->panel.geometry = std::move(arranged.geometry);
    plan_->map = std::move(arranged.map);
    plan_->excluded = std::move(arranged.excluded);
  }

  void exclude_masked() {
    if (!request_.mask) return;
    const std::vector<unsigned char> masked = read_mask(request_, plan_->panel.geometry);
    plan_->excluded.resize(masked.size(), 0);
    for (std::size_t cell = 0; cell < masked.size(); ++cell) plan_->excluded[cell] |= masked[cell];
    const auto left = std::count(plan_->excluded.begin(), plan_->excluded.end(), 0);
    if (left == 0)
      throw Error(ErrorKind::input, "the mask leaves no cell",
                  fmt::format("file: {}, variable: {}", request_.mask->file, request_.mask->variable),
                  "check min, max and values of [input] mask against what the mask file holds");
    plan_->panel.notes.push_back(fmt::format("{} of {} cells are left by the mask", left, masked.size()));
  }

  const InputRequest& request_;
  std::shared_ptr<ArchivePlan> plan_;
  std::vector<FileTimes> times_;
  Geometry geometry_;  ///< in the order of the files
};

class ArchiveSource final : public TileSource {
 public:
  explicit ArchiveSource(std::shared_ptr<const ArchivePlan> plan) : plan_(std::move(plan)) {}
  [[nodiscard]] const Panel& panel() const override { return plan_->panel; }
  [[nodiscard]] std::span<const unsigned char> excluded() const override { return plan_->excluded; }
  [[nodiscard]] std::unique_ptr<Band> read(CellRange cells, std::unique_ptr<Band> reuse) override {
    return std::make_unique<ArchiveBand>(plan_, cells, std::move(reuse));
  }

 private:
  std::shared_ptr<const ArchivePlan> plan_;
};

}  // namespace

VariableLayout reopened(const NcFile& file, const VariableLayout& layout) {
  VariableLayout again = layout;
  auto variable = file.find(layout.variable.path);
  const auto lengths = [](const NcVariable& v) {
    std::vector<std::size_t> out;
    for (const NcDim& dim : v.dims) out.push_back(dim.length);
    return out;
  };
  if (!variable || variable->type != layout.variable.type || lengths(*variable) != lengths(layout.variable))
    throw Error(ErrorKind::input, "the file was changed while it was in use",
                fmt::format("file: {}, variable: {}", file.path(), layout.variable.path),
                "run the job again once nothing writes to the file");
  again.variable = std::move(*variable);
  return again;
}

std::shared_ptr<const ArchivePlan> plan_archive(const InputRequest& request) { return ArchiveOpener(request).open(); }

std::unique_ptr<TileSource> open_nc_archive(const InputRequest& request) {
  return std::make_unique<ArchiveSource>(plan_archive(request));
}

}  // namespace lagscape
