#include "lagscape/cli/app.h"

#include <fmt/format.h>

#include <cstdio>
#include <exception>
#include <new>

#include "cli/command_line.h"
#include "cli/commands.h"
#include "lagscape/base/error.h"

namespace lagscape {

int run_app(int argc, char** argv) {
  try {
    run_command(parse_command_line(argc, argv));
    return 0;
  } catch (const Error& error) {
    fmt::print(stderr, "{}\n", error.what());
    return error.exit_code();
  } catch (const std::bad_alloc&) {
    const Error error(ErrorKind::output, "there is not enough memory", "",
                      "give a smaller --memory, or close other programs");
    fmt::print(stderr, "{}\n", error.what());
    return error.exit_code();
  } catch (const std::exception& problem) {
    const Error error(ErrorKind::internal, fmt::format("a bug of ours: {}", problem.what()), "",
                      "please report it with the command, the job and what 'lagscape --version' prints");
    fmt::print(stderr, "{}\n", error.what());
    return error.exit_code();
  }
}

}  // namespace lagscape
