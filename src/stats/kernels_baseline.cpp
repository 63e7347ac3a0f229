#define LAGSCAPE_KERNELS kernels_baseline
#define LAGSCAPE_ISA_NAME "baseline"
#define LAGSCAPE_WIDTH 2
#define LAGSCAPE_LAGS 6
#include "stats/kernels_inl.h"
