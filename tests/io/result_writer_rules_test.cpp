#include "io/result_writer_rules.h"

#include <gtest/gtest.h>
#include <netcdf.h>
#include <udunits2.h>
#include <unistd.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>
#include <sstream>

namespace lagscape::test {
namespace {

struct Att {
  nc_type type = NC_NAT;
  std::string text;
  std::vector<double> numbers;
};

struct Var {
  int id = -1;
  nc_type type = NC_NAT;
  std::vector<std::string> dims;
  std::map<std::string, Att> atts;

  std::string text(const std::string& name) const { return atts.count(name) ? atts.at(name).text : ""; }
};

std::vector<std::string> words(const std::string& text) {
  std::istringstream in(text);
  return {std::istream_iterator<std::string>(in), {}};
}

bool numeric(nc_type type) {
  return type == NC_FLOAT || type == NC_DOUBLE || type == NC_INT || type == NC_SHORT || type == NC_BYTE;
}

// One file under examination.
class Examination {
 public:
  explicit Examination(const std::string& path) {
    if (nc_open(path.c_str(), NC_NOWRITE, &file_) != NC_NOERR) {
      say("the file does not open");
      return;
    }
    read();
    examine();
    nc_close(file_);
  }

  std::vector<std::string> broken;

 private:
  void say(const std::string& problem) { broken.push_back(problem); }
  void require(bool kept, const std::string& problem) {
    if (!kept) say(problem);
  }

  std::map<std::string, Att> read_atts(int variable) {
    std::map<std::string, Att> out;
    int count = 0;
    nc_inq_varnatts(file_, variable, &count);
    if (variable == NC_GLOBAL) nc_inq_natts(file_, &count);
    for (int i = 0; i < count; ++i) {
      char name[NC_MAX_NAME + 1] = {};
      Att att;
      std::size_t length = 0;
      nc_inq_attname(file_, variable, i, name);
      nc_inq_att(file_, variable, name, &att.type, &length);
      if (att.type == NC_CHAR) {
        att.text.resize(length);
        nc_get_att_text(file_, variable, name, att.text.data());
      } else if (numeric(att.type)) {
        att.numbers.resize(length);
        nc_get_att_double(file_, variable, name, att.numbers.data());
      }
      out[name] = att;
    }
    return out;
  }

  void read() {
    int count = 0;
    nc_inq_nvars(file_, &count);
    for (int id = 0; id < count; ++id) {
      char name[NC_MAX_NAME + 1] = {};
      Var var;
      var.id = id;
      int rank = 0, dims[NC_MAX_VAR_DIMS] = {};
      nc_inq_var(file_, id, name, &var.type, &rank, dims, nullptr);
      for (int d = 0; d < rank; ++d) {
        char dim[NC_MAX_NAME + 1] = {};
        std::size_t length = 0;
        nc_inq_dim(file_, dims[d], dim, &length);
        lengths_[dim] = length;
        var.dims.emplace_back(dim);
      }
      var.atts = read_atts(id);
      vars_[name] = var;
    }
    global_ = read_atts(NC_GLOBAL);
  }

  void examine() {
    int format = 0, unlimited = 0, groups = 0;
    nc_inq_format(file_, &format);
    nc_inq_unlimdim(file_, &unlimited);
    nc_inq_grps(file_, &groups, nullptr);
    require(format == NC_FORMAT_NETCDF4_CLASSIC, "the file is not of the netCDF-4 classic model");
    require(unlimited == -1, "a dimension is unlimited");
    require(groups == 0, "there are groups, in which GDAL loses the place of a map");
    require(global_["Conventions"].text.find("CF-1.10") != std::string::npos,
            "Conventions does not say CF-1.10 (2.6.1)");
    examine_atts("global", global_);
    for (const auto& [name, var] : vars_) {
      require(name.front() != '_', name + ": a name that begins with an underscore (2.3)");
      examine_atts(name, var.atts);
      examine_references(name, var);
      examine_numbers(name, var);
      if (lengths_.count(name)) examine_coordinate(name, var);
      if (is_map(name, var)) examine_map(name, var);
    }
  }

  void examine_atts(const std::string& name, const std::map<std::string, Att>& atts) {
    for (const auto& [att, value] : atts) {
      require(value.type == NC_CHAR || numeric(value.type),
              name + ":" + att + " is neither text of characters nor numbers");
      require(att.front() != '_' || att == "_FillValue", name + ":" + att + " begins with an underscore (2.3)");
    }
    require(atts.count("missing_value") == 0, name + " has a missing_value beside its fill");
    require(atts.count("scale_factor") + atts.count("add_offset") == 0, name + " is packed");
  }

  // Every name in an attribute that names variables is there, and coordinates run over dimensions of the map (5).
  void examine_references(const std::string& name, const Var& var) {
    for (const char* const att : {"coordinates", "ancillary_variables", "bounds", "grid_mapping"})
      for (const std::string& other : words(var.text(att))) {
        require(vars_.count(other) == 1, name + ":" + att + " names " + other + ", which is not there");
        require(other != name, name + ":" + att + " names itself");
        if (vars_.count(other) == 0 || std::string(att) != "coordinates") continue;
        for (const std::string& dim : vars_[other].dims)
          require(std::count(var.dims.begin(), var.dims.end(), dim) == 1,
                  name + ": coordinate " + other + " has another dimension (5)");
      }
    if (!var.text("grid_mapping").empty())
      require(!vars_[var.text("grid_mapping")].text("grid_mapping_name").empty(),
              name + ": a grid_mapping without a name (5.6)");
    if (var.text("bounds").empty()) return;
    std::vector<std::string> wanted = var.dims;
    wanted.emplace_back("nv");
    require(vars_[var.text("bounds")].dims == wanted, name + ": bounds of another shape (7.1)");
  }

  void examine_numbers(const std::string& name, const Var& var) {
    for (const char* const att : {"_FillValue", "valid_range", "flag_values", "flag_masks"})
      require(var.atts.count(att) == 0 || var.atts.at(att).type == var.type,
              name + ":" + att + " is of another type (2.5.1, 3.5)");
    const std::string units = var.text("units");
    if (!units.empty()) {
      ut_unit* const unit = ut_parse(units_, units.c_str(), UT_ASCII);
      require(unit != nullptr, name + ": UDUNITS does not know the unit '" + units + "' (3.1)");
      ut_free(unit);
    }
    if (units.find(" since ") != std::string::npos)
      require(!var.text("calendar").empty(), name + ": a time without a calendar (4.4.1)");
    const std::size_t meanings = words(var.text("flag_meanings")).size();
    for (const char* const att : {"flag_values", "flag_masks"})
      if (var.atts.count(att))
        require(var.atts.at(att).numbers.size() == meanings, name + ": flags without meanings (3.5)");
    static const std::set<std::string> methods{
        "point", "sum", "maximum", "median", "mean", "minimum", "standard_deviation", "variance", "range"};
    const auto parts = words(var.text("cell_methods"));
    for (std::size_t i = 0; i + 1 < parts.size(); i += 2) {
      require(parts[i].back() == ':', name + ": cell_methods not of the form 'name: method' (7.3)");
      require(methods.count(parts[i + 1]) == 1, name + ": no cell method " + parts[i + 1] + " (appendix E)");
    }
  }

  // A coordinate variable is one-dimensional, strictly monotonic and complete (4, 5.1).
  void examine_coordinate(const std::string& name, const Var& var) {
    require(var.dims == std::vector<std::string>{name}, name + ": a coordinate variable of another shape");
    require(var.type == NC_DOUBLE || name == "order", name + ": a coordinate that is not double");
    require(var.atts.count("_FillValue") == 0, name + ": a coordinate with a fill value");
    std::vector<double> values(lengths_[name]);
    nc_get_var_double(file_, var.id, values.data());
    for (std::size_t i = 1; i < values.size(); ++i)
      if (!((values[i] > values[i - 1]) == (values[1] > values[0]) && values[i] != values[i - 1]))
        return say(name + " is not monotonic");
    for (const auto& [standard, unit] :
         {std::pair{"latitude", "degrees_north"}, std::pair{"longitude", "degrees_east"}})
      if (var.text("standard_name") == standard)
        require(var.text("units") == unit, name + ": not in " + unit + " (4.1, 4.2)");
    if (var.text("axis") == "X" && var.text("standard_name") == "longitude" && values.size() > 1)
      require(values[1] > values[0], name + ": longitudes fall, GDAL would mirror the map");
  }

  bool is_map(const std::string& name, const Var& var) const {
    if (lengths_.count(name) || var.type == NC_CHAR || var.dims.empty() || var.dims.back() == "nv") return false;
    const std::string standard = var.text("standard_name");
    return standard != "latitude" && standard != "longitude" && standard != "altitude";
  }

  void examine_map(const std::string& name, const Var& var) {
    require(var.atts.count("_FillValue") == 1, name + " has no fill value");
    require(!var.text("long_name").empty(), name + " has no long name (3.2)");
    require(!var.text("units").empty() || var.atts.count("flag_meanings") == 1,
            name + " has neither unit nor flags (3.1)");
    const double fill = var.atts.count("_FillValue") ? var.atts.at("_FillValue").numbers.at(0) : 0;
    const bool right =
        var.type == NC_FLOAT || var.type == NC_DOUBLE ? std::isnan(fill) : fill == (var.type == NC_BYTE ? 127 : -1);
    require(right, name + " has an unusual fill value");
    const bool sites = var.dims.front() == "station";
    const bool left = var.dims.size() == 3 && (var.dims[0] == "lag" || var.dims[0] == "order");
    require(sites || var.dims.size() == 2 || left, name + ": layers must stand left of the cells (2.4)");
    int contiguous = 0, shuffle = 0, deflate = 0, level = 0;
    std::vector<std::size_t> chunk(var.dims.size());
    nc_inq_var_chunking(file_, var.id, &contiguous, chunk.data());
    nc_inq_var_deflate(file_, var.id, &shuffle, &deflate, &level);
    require(contiguous == NC_CHUNKED && deflate == 1 && shuffle == 1, name + " is not chunked, shuffled and deflated");
    if (sites) return;
    for (std::size_t d = 0; d < chunk.size(); ++d) {
      const std::size_t wanted = chunk.size() == 3 && d == 0 ? 1 : std::min<std::size_t>(lengths_[var.dims[d]], 512);
      require(chunk[d] == wanted, name + ": chunks are not one map of at most 512 x 512");
    }
  }

  // UDUNITS prints where its own database is looked for; that is no finding.
  struct Units {
    Units() {
      ut_set_error_message_handler(ut_ignore);
      system = ut_read_xml(nullptr);
    }
    ~Units() { ut_free_system(system); }
    ut_system* system = nullptr;
  } const holder_;
  ut_system* const units_ = holder_.system;

  int file_ = -1;
  std::map<std::string, Var> vars_;
  std::map<std::string, std::size_t> lengths_;
  std::map<std::string, Att> global_;
};

}  // namespace

std::vector<std::string> broken_rules(const std::string& path) { return Examination(path).broken; }

// The checker itself must be able to fail: a file that breaks many rules at once.
TEST(ResultRules, AreFoundBrokenInAPoorFile) {
  const std::string path = testing::TempDir() + "lagscape_poor_" + std::to_string(getpid()) + ".nc";
  int file = 0, y = 0, x = 0, lat = 0, map = 0;
  ASSERT_EQ(nc_create(path.c_str(), NC_CLOBBER | NC_NETCDF4, &file), NC_NOERR);
  nc_def_dim(file, "lat", 2, &y);
  nc_def_dim(file, "lag", 3, &x);
  nc_def_var(file, "lat", NC_FLOAT, 1, &y, &lat);
  const int dims[] = {y, x};
  nc_def_var(file, "_map", NC_FLOAT, 2, dims, &map);
  nc_put_att_text(file, map, "units", 8, "K/decade");
  nc_put_att_text(file, map, "coordinates", 4, "time");
  nc_put_att_text(file, lat, "standard_name", 8, "latitude");
  nc_close(file);
  const auto broken = broken_rules(path);
  const auto found = [&](const std::string& part) {
    return std::any_of(broken.begin(), broken.end(),
                       [&](const std::string& one) { return one.find(part) != std::string::npos; });
  };
  for (const char* const part : {"classic model", "CF-1.10", "underscore", "K/decade", "names time", "no fill value",
                                 "not monotonic", "not double", "no long name", "not chunked"})
    EXPECT_TRUE(found(part)) << part;
  std::remove(path.c_str());
}

}  // namespace lagscape::test
