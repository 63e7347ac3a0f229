#pragma once
#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

namespace lagscape {

/// Reads a TOML document key by key and gathers every problem with its place, so that all are told at once. Used by job
/// files and forge recipes. A getter returns nothing when the key is absent or wrong (then a problem has been noted).
/// Keys are dotted paths ("prepare.min_share"); array-of-tables elements are reached as "patch[0].ar".
class TomlReader {
 public:
  /// Throws Error{job} for a syntax error or an unreadable file. overrides: "key.path=VALUE", VALUE as TOML, or bare
  /// text.
  static TomlReader from_file(const std::string& path, const std::vector<std::string>& overrides = {});
  static TomlReader from_text(const std::string& text, const std::string& name,
                              const std::vector<std::string>& overrides = {});
  ~TomlReader();
  TomlReader(TomlReader&&) noexcept;

  [[nodiscard]] bool has(const std::string& key) const;
  [[nodiscard]] bool overridden(const std::string& key) const;  ///< came from --set: paths are relative to the shell
  [[nodiscard]] bool is_number(const std::string& key) const;
  [[nodiscard]] bool is_text(const std::string& key) const;
  [[nodiscard]] bool is_table(const std::string& key) const;
  [[nodiscard]] std::size_t array_size(const std::string& key) const;  ///< 0 if absent or not an array
  std::optional<std::string> text(const std::string& key);             ///< TOML dates count as their ISO text
  std::optional<double> number(const std::string& key);                ///< finite; integers count as numbers
  std::optional<std::int64_t> integer(const std::string& key);
  std::optional<bool> boolean(const std::string& key);
  std::optional<std::vector<std::string>> texts(const std::string& key);  ///< a single text counts as a list of one
  std::optional<std::vector<double>> numbers(const std::string& key);     ///< inf is accepted (open ranges), nan is not
  std::optional<std::string> choice(const std::string& key,
                                    const std::vector<std::string>& allowed);  ///< with did-you-mean
  [[nodiscard]] std::vector<std::string> keys(const std::string& table) const;

  /// Notes a problem at the key's place (or at its table's when the key is absent).
  void problem(const std::string& key, const std::string& text);
  /// Notes every key that is not in `known` ("input.files", "patch[].ar" for arrays of tables), with the nearest name.
  /// Those in `later` are noted as keys that a later version will read; they are never offered.
  void refuse_unknown(const std::vector<std::string>& known, const std::vector<std::string>& later = {});
  /// Throws Error{job} listing all problems, in order of place, if there are any.
  void finish() const;
  [[nodiscard]] const std::string& source_text() const;
  [[nodiscard]] std::string folder() const;  ///< of the file; for texts "."

 private:
  struct Impl;
  explicit TomlReader(std::unique_ptr<Impl> impl);
  std::unique_ptr<Impl> impl_;
};

/// The text as a TOML basic string, in double quotes.
[[nodiscard]] std::string toml_text(const std::string& text);

}  // namespace lagscape
