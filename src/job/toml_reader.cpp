#include "lagscape/job/toml_reader.h"

#include <fmt/format.h>
#include <toml++/toml.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <set>
#include <sstream>
#include <tuple>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

/// Where a problem is, for sorting: lines of the file first, then --set options in the order given.
struct Problem {
  std::size_t override_rank = 0;  ///< 0: in the file
  toml::source_position at;
  std::string line;
};

struct Override {
  std::string key, value;
};

std::string type_words(const toml::node& node) {
  switch (node.type()) {
    case toml::node_type::string:
      return fmt::format("the text \"{}\"", node.as_string()->get());
    case toml::node_type::integer:
      return fmt::format("the whole number {}", node.as_integer()->get());
    case toml::node_type::floating_point:
      return fmt::format("the number {}", node.as_floating_point()->get());
    case toml::node_type::boolean:
      return node.as_boolean()->get() ? "true" : "false";
    case toml::node_type::table:
      return "a table";
    case toml::node_type::array:
      return "a list";
    default:
      return "a date or time";
  }
}

/// TOML's own dates and times stand for their ISO text.
std::optional<std::string> as_text(const toml::node& node) {
  if (const auto* text = node.as_string()) return text->get();
  std::ostringstream out;
  if (const auto* date = node.as_date())
    out << date->get();
  else if (const auto* date_time = node.as_date_time())
    out << date_time->get();
  else
    return std::nullopt;
  return out.str();
}

std::optional<double> as_number(const toml::node& node) {
  if (const auto* whole = node.as_integer()) return static_cast<double>(whole->get());
  if (const auto* real = node.as_floating_point(); real != nullptr && !std::isnan(real->get())) return real->get();
  return std::nullopt;
}

/// "patch[2]" -> {"patch", 2}; "name" -> {"name", nothing}.
std::pair<std::string, std::optional<std::size_t>> split_index(const std::string& part) {
  const std::size_t open = part.find('[');
  if (open == std::string::npos || part.back() != ']') return {part, std::nullopt};
  const auto index = to_number(part.substr(open + 1, part.size() - open - 2));
  if (!index || *index < 0 || *index > 1e9 || *index != std::floor(*index)) return {part, std::nullopt};
  return {part.substr(0, open), static_cast<std::size_t>(*index)};
}

/// The node at a dotted path; at each table the rest of the path may also be one key that contains dots.
const toml::node* find_node(const toml::table& table, const std::string& path) {
  if (const toml::node* whole = table.get(path)) return whole;
  const std::size_t dot = path.find('.');
  const auto [name, index] = split_index(path.substr(0, dot));
  const toml::node* node = table.get(name);
  if (node != nullptr && index) node = node->is_array() ? node->as_array()->get(*index) : nullptr;
  if (node == nullptr || dot == std::string::npos) return node;
  return node->is_table() ? find_node(*node->as_table(), path.substr(dot + 1)) : nullptr;
}

std::string parent_of(const std::string& key) {
  const std::size_t dot = key.rfind('.');
  return dot == std::string::npos ? std::string() : key.substr(0, dot);
}

std::string last_part(const std::string& key) { return key.substr(key.rfind('.') + 1); }

std::string joined(const std::string& table, const std::string& name) {
  return table.empty() ? name : table + "." + name;
}

/// "patch[2].ar" -> "patch[].ar", as keys are written in lists of known keys.
std::string without_indices(const std::string& key) {
  std::string out;
  bool inside = false;
  for (const char c : key) {
    if (c == ']') inside = false;
    if (!inside) out += c;
    if (c == '[') inside = true;
  }
  return out;
}

bool starts_with(const std::string& text, const std::string& head) { return text.compare(0, head.size(), head) == 0; }

toml::table parse_toml(const std::string& text, const std::string& name) {
  try {
    return toml::parse(text, name);
  } catch (const toml::parse_error& error) {
    const toml::source_position at = error.source().begin;
    throw Error(
        ErrorKind::job, fmt::format("not valid TOML: {}", error.description()),
        fmt::format("{}:{}:{}", name, at.line, at.column),
        "texts need a quote at either end, lists square brackets, and each key may stand only once in its table");
  }
}

/// All of a file. Data given by mistake are told as what they are, by the first bytes of NetCDF and HDF5.
std::string read_text(const std::string& path) {
  std::error_code ignored;
  std::ifstream file(path, std::ios::binary);
  if (!file && !std::filesystem::exists(path, ignored))
    throw Error(ErrorKind::job, "this file does not exist", path, "give the path of a TOML file");
  if (std::filesystem::is_directory(path, ignored))
    throw Error(ErrorKind::job, "this is a folder, not a TOML file", path, "give the path of a TOML file in it");
  if (!file) throw Error(ErrorKind::job, "this file cannot be read", path, "give a TOML file that you may read");
  std::string text(4, '\0');
  file.read(text.data(), 4);
  text.resize(static_cast<std::size_t>(file.gcount()));
  if (text == "CDF\1" || text == "CDF\2" || text == "CDF\5" || text == "\211HDF") {
    throw Error(ErrorKind::job, "this looks like a NetCDF file, expected a TOML file", path,
                "'lagscape survey FILE --write-job job.toml' writes a job for a data file");
  }
  return text.append(std::istreambuf_iterator<char>(file), {});
}

/// The value of an override: TOML, or else the bare text. `values` owns the node.
const toml::node* parse_value(const std::string& text, toml::table& values) {
  try {
    values = toml::parse("value = " + text);
    if (values.size() == 1) return values.get("value");
  } catch (const toml::parse_error&) {
    // not TOML: a bare text such as a path or a name
  }
  values = toml::table{{"value", text}};
  return values.get("value");
}

}  // namespace

struct TomlReader::Impl {
  std::string file, source, folder = ".";
  toml::table root;
  std::vector<Override> overrides;
  std::vector<Problem> problems;

  /// 1 + number of the override that set this key or a table around it; 0 if the file did.
  [[nodiscard]] std::size_t override_rank(const std::string& key) const {
    for (std::size_t i = overrides.size(); i-- > 0;) {
      if (key == overrides[i].key || starts_with(key, overrides[i].key + ".") ||
          starts_with(key, overrides[i].key + "["))
        return i + 1;
    }
    return 0;
  }

  /// The same for a table that stands in no file because an override made it.
  [[nodiscard]] std::size_t making_override(const std::string& table) const {
    const auto made = std::find_if(overrides.begin(), overrides.end(),
                                   [&](const Override& one) { return starts_with(one.key, table + "."); });
    return made == overrides.end() ? 0 : static_cast<std::size_t>(made - overrides.begin()) + 1;
  }

  void note(const std::string& key, toml::source_position at, const std::string& text) {
    std::size_t rank = override_rank(key);
    if (at.line == 0) {
      if (rank == 0) rank = making_override(key);
      at = {1, 1};
    }
    std::string line = rank > 0 ? fmt::format("--set {}: {}", overrides[rank - 1].key, text)
                                : fmt::format("{}:{}:{}: {}", file, at.line, at.column, text);
    problems.push_back({rank, at, std::move(line)});
  }

  /// Notes a problem at the value, or at the nearest table around it that exists.
  void note(const std::string& key, const std::string& text) {
    for (std::string at = key; !at.empty(); at = parent_of(at)) {
      if (const toml::node* node = find_node(root, at)) return note(key, node->source().begin, text);
    }
    note(key, {1, 1}, text);
  }

  void wrong_type(const std::string& key, const toml::node& found, std::string_view expected) {
    toml::source_position at = found.source().begin;
    note(key, at, fmt::format("{}: found {}, expected {}", last_part(key), type_words(found), expected));
  }

  void apply(const std::string& option);
  bool insert(const std::string& key, const toml::node& value);
  [[nodiscard]] std::string misplaced_words(const std::string& key) const;
  void refuse_unknown(const toml::table& table, const std::string& path, const std::vector<std::string>& known,
                      const std::vector<std::string>& later);
  void check_node(const std::string& path, const toml::key& key, const toml::node& node,
                  const std::vector<std::string>& known, const std::vector<std::string>& later);
  [[nodiscard]] std::string unknown_words(const std::string& path, const std::string& name,
                                          const std::vector<std::string>& known) const;
};

/// Puts the value into the tree, making tables on the way; false if something else than a table is in the way.
bool TomlReader::Impl::insert(const std::string& key, const toml::node& value) {
  toml::table* table = &root;
  const std::vector<std::string> parts = split(key, '.');
  for (std::size_t i = 0; i + 1 < parts.size(); ++i) {
    const auto [part, index] = split_index(parts[i]);
    if (table->get(part) == nullptr && !index) table->insert(part, toml::table{});
    toml::node* next = table->get(part);
    if (next != nullptr && index) next = next->is_array() ? next->as_array()->get(*index) : nullptr;
    if (next == nullptr || !next->is_table()) return false;
    table = next->as_table();
  }
  value.visit([&](const auto& concrete) { table->insert_or_assign(parts.back(), concrete); });
  return true;
}

/// Why an override finds no table; how elements of a list are written if the key leads through one.
std::string TomlReader::Impl::misplaced_words(const std::string& key) const {
  std::string list;
  for (const std::string& part : split(parent_of(key), '.')) {
    list = joined(list, split_index(part).first);
    const toml::node* node = find_node(root, list);
    if (node == nullptr || !node->is_array() || node->as_array()->empty()) continue;
    const std::size_t last = node->as_array()->size() - 1;
    const std::string elements =
        last == 0 ? fmt::format("is {}[0]", list) : fmt::format("are {}[0] to {}[{}]", list, list, last);
    return fmt::format("'{}' is a list, whose {} {}: write {}[0].{}", list, last == 0 ? "only element" : "elements",
                       elements, list, last_part(key));
  }
  return fmt::format("there is no table '{}' to put it into", parent_of(key));
}

void TomlReader::Impl::apply(const std::string& option) {
  const std::size_t equals = option.find('=');
  const std::string key(trim(option.substr(0, equals)));
  if (equals == std::string::npos || key.empty()) {
    problems.push_back(
        {overrides.size() + 1, {}, fmt::format("--set {}: expected KEY=VALUE, such as field.rate=0.05", option)});
    return;
  }
  overrides.push_back({key, option.substr(equals + 1)});
  toml::table owner;
  const toml::node* value = parse_value(overrides.back().value, owner);
  if (!insert(key, *value)) note(key, misplaced_words(key));
}

TomlReader::TomlReader(std::unique_ptr<Impl> impl) : impl_(std::move(impl)) {}
TomlReader::~TomlReader() = default;
TomlReader::TomlReader(TomlReader&&) noexcept = default;

TomlReader TomlReader::from_text(const std::string& text, const std::string& name,
                                 const std::vector<std::string>& overrides) {
  auto impl = std::make_unique<Impl>();
  impl->file = name;
  impl->source = text;
  impl->root = parse_toml(text, name);
  for (const std::string& option : overrides) impl->apply(option);
  return TomlReader(std::move(impl));
}

TomlReader TomlReader::from_file(const std::string& path, const std::vector<std::string>& overrides) {
  const std::string text = read_text(path);
  TomlReader reader = from_text(text, path, overrides);
  const std::filesystem::path folder = std::filesystem::path(path).parent_path();
  reader.impl_->folder = folder.empty() ? "." : folder.string();
  return reader;
}

bool TomlReader::has(const std::string& key) const { return find_node(impl_->root, key) != nullptr; }

bool TomlReader::overridden(const std::string& key) const { return impl_->override_rank(key) > 0; }

bool TomlReader::is_number(const std::string& key) const {
  const toml::node* node = find_node(impl_->root, key);
  return node != nullptr && node->is_number();
}

bool TomlReader::is_text(const std::string& key) const {
  const toml::node* node = find_node(impl_->root, key);
  return node != nullptr && node->is_string();
}

bool TomlReader::is_table(const std::string& key) const {
  const toml::node* node = find_node(impl_->root, key);
  return node != nullptr && node->is_table();
}

std::size_t TomlReader::array_size(const std::string& key) const {
  const toml::node* node = find_node(impl_->root, key);
  return node != nullptr && node->is_array() ? node->as_array()->size() : 0;
}

std::optional<std::string> TomlReader::text(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  auto value = as_text(*node);
  if (!value) impl_->wrong_type(key, *node, "a text");
  return value;
}

std::optional<double> TomlReader::number(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  const auto value = as_number(*node);
  if (value && std::isfinite(*value)) return value;
  impl_->wrong_type(key, *node, node->is_number() ? "a finite number" : "a number");
  return std::nullopt;
}

std::optional<std::int64_t> TomlReader::integer(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  if (const auto* whole = node->as_integer()) return whole->get();
  impl_->wrong_type(key, *node, "a whole number");
  return std::nullopt;
}

std::optional<bool> TomlReader::boolean(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  if (const auto* value = node->as_boolean()) return value->get();
  impl_->wrong_type(key, *node, "true or false");
  return std::nullopt;
}

std::optional<std::vector<std::string>> TomlReader::texts(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  if (auto single = as_text(*node)) return std::vector<std::string>{*single};
  if (!node->is_array()) {
    impl_->wrong_type(key, *node, "a list of texts");
    return std::nullopt;
  }
  std::vector<std::string> values;
  bool good = true;
  for (const toml::node& element : *node->as_array()) {
    if (auto value = as_text(element))
      values.push_back(std::move(*value));
    else
      good = false, impl_->wrong_type(key, element, "only texts in this list");
  }
  return good ? std::optional(std::move(values)) : std::nullopt;
}

std::optional<std::vector<double>> TomlReader::numbers(const std::string& key) {
  const toml::node* node = find_node(impl_->root, key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_array()) {
    impl_->wrong_type(key, *node, "a list of numbers in square brackets");
    return std::nullopt;
  }
  std::vector<double> values;
  bool good = true;
  for (const toml::node& element : *node->as_array()) {
    if (const auto value = as_number(element))
      values.push_back(*value);
    else
      good = false, impl_->wrong_type(key, element, "only numbers in this list");
  }
  return good ? std::optional(std::move(values)) : std::nullopt;
}

std::optional<std::string> TomlReader::choice(const std::string& key, const std::vector<std::string>& allowed) {
  auto value = text(key);
  if (!value || std::find(allowed.begin(), allowed.end(), *value) != allowed.end()) return value;
  problem(key, fmt::format("{}: found \"{}\", expected {}{}", last_part(key), *value, join(allowed, " | "),
                           did_you_mean(*value, allowed)));
  return std::nullopt;
}

std::vector<std::string> TomlReader::keys(const std::string& table) const {
  const toml::node* node = table.empty() ? &impl_->root : find_node(impl_->root, table);
  std::vector<std::string> names;
  if (node == nullptr || !node->is_table()) return names;
  for (const auto& [key, value] : *node->as_table()) names.emplace_back(key.str());
  return names;
}

void TomlReader::problem(const std::string& key, const std::string& text) { impl_->note(key, text); }

/// What to say about a key nobody knows: the nearest sibling, or the table in which such a key does exist.
std::string TomlReader::Impl::unknown_words(const std::string& path, const std::string& name,
                                            const std::vector<std::string>& known) const {
  const std::string table = without_indices(path);
  std::set<std::string> siblings;
  std::optional<std::string> elsewhere;
  for (const std::string& key : known) {
    if (table.empty() || starts_with(key, table + ".")) {
      std::string rest = table.empty() ? key : key.substr(table.size() + 1);
      rest = rest.substr(0, rest.find('.'));
      siblings.insert(rest.substr(0, rest.find('[')));
    }
    if (last_part(key) == name && parent_of(key) != table) elsewhere = elsewhere.value_or(key);
  }
  const std::vector<std::string> names(siblings.begin(), siblings.end());
  std::string text =
      path.empty() ? fmt::format("unknown key '{}'", name) : fmt::format("unknown key '{}' in [{}]", name, path);
  if (const auto near = nearest_name(name, names)) return text + fmt::format(", did you mean '{}'?", *near);
  if (elsewhere)
    return text + fmt::format("; there is a '{}', which belongs in [{}]", *elsewhere, parent_of(*elsewhere));
  return text + fmt::format("; known here: {}", join(names, ", "));
}

void TomlReader::Impl::check_node(const std::string& path, const toml::key& key, const toml::node& node,
                                  const std::vector<std::string>& known, const std::vector<std::string>& later) {
  const std::string name(key.str());
  const std::string full = joined(path, name);
  const std::string pattern = without_indices(full);
  if (std::find(later.begin(), later.end(), pattern) != later.end()) {
    return note(full, key.source().begin,
                fmt::format("{}: a later version will read this key; take it out for now", name));
  }
  const auto any_starts = [&](const std::string& head) {
    return std::any_of(known.begin(), known.end(), [&](const std::string& k) { return starts_with(k, head); });
  };
  const bool exact = std::find(known.begin(), known.end(), pattern) != known.end();
  const bool table = any_starts(pattern + ".");
  const bool tables = any_starts(pattern + "[].");
  if (!exact && !table && !tables) return note(full, key.source().begin, unknown_words(path, name, known));
  if (table && node.is_table()) return refuse_unknown(*node.as_table(), full, known, later);
  if (tables && node.is_array_of_tables()) {
    for (std::size_t i = 0; i < node.as_array()->size(); ++i) {
      refuse_unknown(*node.as_array()->get(i)->as_table(), fmt::format("{}[{}]", full, i), known, later);
    }
    return;
  }
  if (!exact)
    wrong_type(full, node,
               tables ? fmt::format("tables that begin with [[{}]]", name) : fmt::format("a table [{}]", name));
}

void TomlReader::Impl::refuse_unknown(const toml::table& table, const std::string& path,
                                      const std::vector<std::string>& known, const std::vector<std::string>& later) {
  for (const auto& [key, node] : table) check_node(path, key, node, known, later);
}

void TomlReader::refuse_unknown(const std::vector<std::string>& known, const std::vector<std::string>& later) {
  impl_->refuse_unknown(impl_->root, "", known, later);
}

void TomlReader::finish() const {
  if (impl_->problems.empty()) return;
  std::vector<Problem> sorted = impl_->problems;
  std::stable_sort(sorted.begin(), sorted.end(), [](const Problem& a, const Problem& b) {
    return std::tie(a.override_rank, a.at.line, a.at.column) < std::tie(b.override_rank, b.at.line, b.at.column);
  });
  std::vector<std::string> lines;
  for (const Problem& problem : sorted) {
    if (std::find(lines.begin(), lines.end(), problem.line) == lines.end()) lines.push_back(problem.line);
  }
  const std::string count = lines.size() == 1 ? "1 problem" : fmt::format("{} problems", lines.size());
  throw Error(ErrorKind::job, fmt::format("{} in {}\n  {}", count, impl_->file, join(lines, "\n  ")), "",
              "correct the places named above; nothing has been run");
}

const std::string& TomlReader::source_text() const { return impl_->source; }

std::string TomlReader::folder() const { return impl_->folder; }

std::string toml_text(const std::string& text) {
  std::string out = "\"";
  for (const char c : text) {
    const auto code = static_cast<unsigned char>(c);
    if (c == '"' || c == '\\')
      out += fmt::format("\\{}", c);
    else if (c == '\n')
      out += "\\n";
    else if (c == '\t')
      out += "\\t";
    else if (code < 0x20 || code == 0x7F)
      out += fmt::format("\\u{:04X}", static_cast<unsigned>(code));
    else
      out += c;
  }
  return out + '"';
}

}  // namespace lagscape
