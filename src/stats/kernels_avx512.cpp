#define LAGSCAPE_KERNELS kernels_avx512
#define LAGSCAPE_ISA_NAME "avx512"
#define LAGSCAPE_WIDTH 8
#define LAGSCAPE_LAGS 12
#include "stats/kernels_inl.h"
