// Bodies of the kernels, compiled once per instruction set: the including file defines LAGSCAPE_KERNELS (name of the
// namespace), LAGSCAPE_WIDTH (doubles in a register) and LAGSCAPE_LAGS (lags kept in registers at once). Everything
// here has internal linkage: an inline function compiled for AVX-512 must never be the copy the linker keeps.
#if defined(__AVX2__)
#include <immintrin.h>
#elif defined(__SSE2__)
#include <emmintrin.h>
#endif

#include <cstddef>
#include <cstdint>

#include "lagscape/stats/kernels.h"

namespace lagscape {
namespace {

using std::size_t;
using std::uint8_t;

constexpr size_t kWidth = LAGSCAPE_WIDTH;
constexpr size_t kLagsAtOnce = LAGSCAPE_LAGS;
constexpr size_t kTimeBlock = 504;  // two streams of 32 KiB stay in the first-level cache
static_assert(kLagsAtOnce <= kPadRows);

using V = double __attribute__((vector_size(8 * LAGSCAPE_WIDTH), may_alias));
using M = long long __attribute__((vector_size(8 * LAGSCAPE_WIDTH), may_alias));

inline V load(const double* from) { return *reinterpret_cast<const V*>(from); }
inline void store(double* to, V value) { *reinterpret_cast<V*>(to) = value; }
inline V all(double value) { return value - V{}; }

/// a * b + c in one rounding where the processor can: AVX2 and AVX-512 then give the same bits.
inline V fma(V a, V b, V c) {
#if LAGSCAPE_WIDTH == 8
  return _mm512_fmadd_pd(a, b, c);
#elif LAGSCAPE_WIDTH == 4
  return _mm256_fmadd_pd(a, b, c);
#else
  return a * b + c;
#endif
}

/// Bits of the lanes that hold a number.
inline unsigned numbers(V x) {
#if LAGSCAPE_WIDTH == 8
  return _mm512_cmp_pd_mask(x, x, _CMP_ORD_Q);
#elif LAGSCAPE_WIDTH == 4
  return static_cast<unsigned>(_mm256_movemask_pd(_mm256_cmp_pd(x, x, _CMP_ORD_Q)));
#elif defined(__SSE2__)
  return static_cast<unsigned>(_mm_movemask_pd(_mm_cmpord_pd(x, x)));
#else
  unsigned bits = 0;
  for (size_t lane = 0; lane < kWidth; ++lane) bits |= static_cast<unsigned>(x[lane] == x[lane]) << lane;
  return bits;
#endif
}

/// All ones in the lanes whose bit is set; lane0: first lane of this register.
inline M mask_of(unsigned bits, size_t lane0) {
  M selected{};
  for (size_t lane = 0; lane < kWidth; ++lane) selected[lane] = 1LL << (lane0 + lane);
  return ((static_cast<long long>(bits) - M{}) & selected) != 0;
}

/// x in the lanes whose bit is set, else 0.
inline V keep(V x, unsigned bits, size_t lane0) {
#if LAGSCAPE_WIDTH == 8
  (void)lane0;
  return _mm512_maskz_mov_pd(static_cast<__mmask8>(bits), x);
#else
  return reinterpret_cast<V>(reinterpret_cast<M>(x) & mask_of(bits, lane0));
#endif
}

void summarise(const double* x, size_t steps, uint8_t* bits, LaneSummary* out) noexcept {
  for (size_t t = 0; t < steps; ++t) {
    unsigned valid = 0;
    for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) valid |= numbers(load(x + t * kLanes + lane0)) << lane0;
    bits[t] = static_cast<uint8_t>(valid);
  }
  const V infinity = all(__builtin_inf()), one = all(1.0), zero{};
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    V count{}, sum{}, low = infinity, high = -infinity, first = infinity, last = -one, run{}, longest{};
    V candidate = all(__builtin_nan("")), votes{};
    for (size_t t = 0; t < steps; ++t) {
      const V value = load(x + t * kLanes + lane0);
      const M valid = mask_of(bits[t], lane0);
      const V now = all(static_cast<double>(t));
      count += keep(one, bits[t], lane0);
      sum += keep(value, bits[t], lane0);
      low = value < low ? value : low;
      high = value > high ? value : high;
      first = (valid & (now < first)) ? now : first;
      longest = (valid & (run > longest)) ? run : longest;
      run = valid ? zero : ((last >= zero) ? run + one : zero);  // gaps count from the first value on
      last = valid ? now : last;
      votes = valid ? (value == candidate ? votes + one : votes - one) : votes;
      candidate = votes < zero ? value : candidate;
      votes = votes < zero ? one : votes;
    }
    store(out->count + lane0, count);
    store(out->sum + lane0, sum);
    store(out->low + lane0, low);
    store(out->high + lane0, high);
    store(out->first + lane0, first);
    store(out->last + lane0, last);
    store(out->longest_gap + lane0, longest);
    store(out->candidate + lane0, candidate);
  }
}

void count_equal(const double* x, size_t steps, const double* value, double* out) noexcept {
  const V one = all(1.0), zero{};
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    const V wanted = load(value + lane0);
    V count{};
    for (size_t t = 0; t < steps; ++t) count += load(x + t * kLanes + lane0) == wanted ? one : zero;
    store(out + lane0, count);
  }
}

void center(const double* x, const uint8_t* bits, const DesignView& design, const double* centre, double* d,
            double* group_sums, double* group_counts) noexcept {
  for (size_t i = 0; i < design.groups * kLanes; ++i) group_sums[i] = group_counts[i] = 0;
  const V one = all(1.0);
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    const V middle = load(centre + lane0);
    for (size_t t = 0; t < design.steps; ++t) {
      const V value = keep(load(x + t * kLanes + lane0) - middle, bits[t], lane0);
      store(d + t * kLanes + lane0, value);
      double* sums = group_sums + design.group[t] * kLanes + lane0;
      double* counts = group_counts + design.group[t] * kLanes + lane0;
      store(sums, load(sums) + value);
      store(counts, load(counts) + keep(one, bits[t], lane0));
    }
  }
}

/// Dot products with `count` neighbouring columns, held in registers.
template <size_t count>
inline void project_columns(const double* d, const DesignView& design, size_t column, double* dots, size_t lane0) {
  V sums[count] = {};
  const double* columns = design.columns + column * design.steps;
  for (size_t t = 0; t < design.steps; ++t) {
    const V value = load(d + t * kLanes + lane0);
    for (size_t j = 0; j < count; ++j) sums[j] = fma(value, all(columns[j * design.steps + t]), sums[j]);
  }
  for (size_t j = 0; j < count; ++j) store(dots + (column + j) * kLanes + lane0, sums[j]);
}

void project(const double* d, const DesignView& design, double* dots, double* group_sums) noexcept {
  for (size_t i = 0; i < design.groups * kLanes; ++i) group_sums[i] = 0;
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    for (size_t t = 0; t < design.steps; ++t) {
      double* sums = group_sums + design.group[t] * kLanes + lane0;
      store(sums, load(sums) + load(d + t * kLanes + lane0));
    }
    size_t column = 0;
    for (; column + 4 <= design.dense; column += 4) project_columns<4>(d, design, column, dots, lane0);
    for (; column < design.dense; ++column) project_columns<1>(d, design, column, dots, lane0);
  }
}

void missing_rows(const uint8_t* bits, const DesignView& design, double* cross, double* group_columns) noexcept {
  const size_t dense = design.dense;
  for (size_t i = 0; i < dense * dense * kLanes; ++i) cross[i] = 0;
  for (size_t i = 0; i < design.groups * dense * kLanes; ++i) group_columns[i] = 0;
  const V one = all(1.0);
  for (size_t t = 0; t < design.steps; ++t) {
    if (bits[t] == 0xFF) continue;
    for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
      const V missing = keep(one, ~static_cast<unsigned>(bits[t]), lane0);
      double* of_group = group_columns + design.group[t] * dense * kLanes + lane0;
      for (size_t i = 0; i < dense; ++i) {
        const V value = missing * design.columns[i * design.steps + t];
        store(of_group + i * kLanes, load(of_group + i * kLanes) + value);
        for (size_t j = 0; j <= i; ++j) {
          double* cell = cross + (i * dense + j) * kLanes + lane0;
          store(cell, fma(value, all(design.columns[j * design.steps + t]), load(cell)));
        }
      }
    }
  }
}

void subtract_fit(double* d, const uint8_t* bits, const DesignView& design, const double* group_effect,
                  const double* effect) noexcept {
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    for (size_t t = 0; t < design.steps; ++t) {
      V rest = load(d + t * kLanes + lane0) - load(group_effect + design.group[t] * kLanes + lane0);
      for (size_t j = 0; j < design.dense; ++j) {
        rest = fma(-load(effect + j * kLanes + lane0), all(design.columns[j * design.steps + t]), rest);
      }
      store(d + t * kLanes + lane0, keep(rest, bits[t], lane0));
    }
  }
}

void component_sums(const double* x, const double* d, const uint8_t* bits, size_t steps, const double* mean,
                    const double* terms, size_t count, const double* coefficients, double* sums) noexcept {
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    const V middle = load(mean + lane0);
    const V first = load(coefficients + lane0), second = load(coefficients + kLanes + lane0);
    V drift_sum{}, drift_squares{}, rest_sum{}, rest_squares{};
    for (size_t t = 0; t < steps; ++t) {
      V drift{};
      if (count > 0) drift = first * all(terms[t]);
      if (count > 1) drift = fma(second, all(terms[steps + t]), drift);
      drift = keep(drift, bits[t], lane0);
      const V fitted = load(x + t * kLanes + lane0) - middle - load(d + t * kLanes + lane0);
      const V rest = keep(fitted - drift, bits[t], lane0);
      drift_sum += drift;
      drift_squares = fma(drift, drift, drift_squares);
      rest_sum += rest;
      rest_squares = fma(rest, rest, rest_squares);
    }
    store(sums + lane0, drift_sum);
    store(sums + kLanes + lane0, drift_squares);
    store(sums + 2 * kLanes + lane0, rest_sum);
    store(sums + 3 * kLanes + lane0, rest_squares);
  }
}

/// One block of time and kLagsAtOnce lags: each value is loaded once, the partners stream past it.
inline void lag_block(const double* d, size_t begin, size_t end, size_t first, size_t lane0, V* sums) {
  V partial[kLagsAtOnce] = {};
  for (size_t t = begin; t < end; ++t) {
    const V value = load(d + t * kLanes + lane0);
    const double* later = d + (t + first) * kLanes + lane0;
    for (size_t k = 0; k < kLagsAtOnce; ++k) partial[k] = fma(value, load(later + k * kLanes), partial[k]);
  }
  for (size_t k = 0; k < kLagsAtOnce; ++k) sums[k] += partial[k];
}

void lag_products(const double* d, size_t steps, size_t first, size_t count, double* sums) noexcept {
  for (size_t done = 0; done < count; done += kLagsAtOnce) {
    const size_t lag = first + done;
    const size_t wanted = count - done < kLagsAtOnce ? count - done : kLagsAtOnce;
    for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
      V total[kLagsAtOnce] = {};
      for (size_t begin = 0; begin + lag < steps; begin += kTimeBlock) {
        const size_t rows = steps - lag - begin;
        lag_block(d, begin, begin + (rows < kTimeBlock ? rows : kTimeBlock), lag, lane0, total);
      }
      for (size_t k = 0; k < wanted; ++k) store(sums + (done + k) * kLanes + lane0, total[k]);
    }
  }
}

/// Sums of one order of Burg's recursion, for the lanes of one register.
struct BurgSums {
  V product{}, forward{}, backward{}, count{};
  inline void add(V ahead, V behind, unsigned valid, size_t lane0) {
    const V f = keep(ahead, valid, lane0), b = keep(behind, valid, lane0);
    product = fma(f, b, product);
    forward = fma(f, f, forward);
    backward = fma(b, b, backward);
    count += keep(all(1.0), valid, lane0);
  }
};

void burg(const double* d, const uint8_t* bits, size_t steps, size_t orders, double* work, uint8_t* window,
          double* partial, double* usable) noexcept {
  double* forward = work;
  double* backward = work + steps * kLanes;
  // Before the sums of an order, step t counts only where x[t - order] .. x[t] are all valid.
  const auto narrow = [&](size_t order) {
    for (size_t t = steps; t-- > 0;)
      window[t] = t < order ? uint8_t{0} : static_cast<uint8_t>(window[t] & bits[t - order]);
  };
  for (size_t i = 0; i < steps * kLanes; ++i) forward[i] = backward[i] = d[i];
  for (size_t t = 0; t < steps; ++t) window[t] = bits[t];
  narrow(1);
  constexpr size_t kRegisters = kLanes / kWidth;
  BurgSums sums[kRegisters];
  for (size_t part = 0; part < kRegisters; ++part) {
    const size_t lane0 = part * kWidth;
    for (size_t t = 1; t < steps; ++t) {
      sums[part].add(load(d + t * kLanes + lane0), load(d + (t - 1) * kLanes + lane0), window[t], lane0);
    }
  }
  const V zero{};
  for (size_t order = 1; order <= orders; ++order) {
    narrow(order + 1);
    for (size_t part = 0; part < kRegisters; ++part) {
      const size_t lane0 = part * kWidth;
      const BurgSums found = sums[part];
      const V power = found.forward + found.backward;
      const V k = power > zero ? (found.product + found.product) / power : zero;
      store(partial + (order - 1) * kLanes + lane0, k);
      store(usable + (order - 1) * kLanes + lane0, found.count);
      // One pass updates both errors and sums the next order: the error behind is the new one of the step before.
      BurgSums next;
      V behind = load(backward + (order - 1) * kLanes + lane0), new_behind{};
      for (size_t t = order; t < steps; ++t) {
        const V ahead = load(forward + t * kLanes + lane0), then = load(backward + t * kLanes + lane0);
        const V new_ahead = fma(-k, behind, ahead);
        next.add(new_ahead, new_behind, window[t], lane0);
        new_behind = fma(-k, ahead, behind);
        store(forward + t * kLanes + lane0, new_ahead);
        store(backward + t * kLanes + lane0, new_behind);
        behind = then;
      }
      sums[part] = next;
    }
  }
}

void durbin_levinson(const double* r, size_t lags, double* work, double* partial) noexcept {
  const V one = all(1.0);
  for (size_t lane0 = 0; lane0 < kLanes; lane0 += kWidth) {
    double* now = work + lane0;
    double* before = work + (lags + 1) * kLanes + lane0;
    V left = one;  // variance left: 1 - sum_j f_j r_j
    for (size_t k = 1; k <= lags; ++k) {
      V sum = load(r + k * kLanes + lane0);
      for (size_t j = 1; j < k; ++j) sum = fma(-load(before + j * kLanes), load(r + (k - j) * kLanes + lane0), sum);
      const V value = sum / left;
      store(partial + k * kLanes + lane0, value);
      for (size_t j = 1; j < k; ++j) {
        store(now + j * kLanes, fma(-value, load(before + (k - j) * kLanes), load(before + j * kLanes)));
      }
      store(now + k * kLanes, value);
      left = left * (one - value * value);
      double* swap = now;
      now = before;
      before = swap;
    }
  }
}

}  // namespace

extern const KernelTable LAGSCAPE_KERNELS;
const KernelTable LAGSCAPE_KERNELS = {
    .isa = LAGSCAPE_ISA_NAME,
    .summarise = summarise,
    .count_equal = count_equal,
    .center = center,
    .project = project,
    .missing_rows = missing_rows,
    .subtract_fit = subtract_fit,
    .component_sums = component_sums,
    .lag_products = lag_products,
    .burg = burg,
    .durbin_levinson = durbin_levinson,
};

}  // namespace lagscape
