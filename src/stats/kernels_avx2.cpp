#define LAGSCAPE_KERNELS kernels_avx2
#define LAGSCAPE_ISA_NAME "avx2"
#define LAGSCAPE_WIDTH 4
#define LAGSCAPE_LAGS 6
#include "stats/kernels_inl.h"
