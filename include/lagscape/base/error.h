#pragma once
#include <exception>
#include <string>
#include <string_view>
#include <utility>

namespace lagscape {

/// Why a job cannot go on; the value is the program's exit code (README, "Exit codes").
enum class ErrorKind : int { internal = 1, usage = 2, job = 3, input = 4, output = 5, interrupted = 130 };

/// The job cannot go on. One error is one block of text: what happened (found and expected), where, what to do.
/// A cell that cannot be computed is not an error but a status bit.
class Error : public std::exception {
 public:
  /// problem: one sentence without a final stop. where: "file: obs.nc, variable: sst" or "job.toml:4:1". fix: what to
  /// do.
  Error(ErrorKind kind, std::string problem, std::string where = {}, std::string fix = {});
  [[nodiscard]] ErrorKind kind() const noexcept { return kind_; }
  [[nodiscard]] int exit_code() const noexcept { return static_cast<int>(kind_); }
  [[nodiscard]] const std::string& problem() const noexcept { return problem_; }
  [[nodiscard]] const std::string& where() const noexcept { return where_; }
  [[nodiscard]] const std::string& fix() const noexcept { return fix_; }
  /// The whole block: "error: PROBLEM\n  where: WHERE\n  fix:   FIX" (lines that are empty are left out).
  [[nodiscard]] const char* what() const noexcept override { return text_.c_str(); }

 private:
  ErrorKind kind_;
  std::string problem_, where_, fix_, text_;
};

}  // namespace lagscape
