#include "lagscape/cli/app.h"

int main(int argc, char** argv) { return lagscape::run_app(argc, argv); }
