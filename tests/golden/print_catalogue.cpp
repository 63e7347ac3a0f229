#include <fmt/format.h>

#include "lagscape/report/render.h"

// Prints the README's table of maps; not part of the program, because nobody but its test and its writer needs it.
int main() { fmt::print("{}", lagscape::catalogue_markdown()); }
