#pragma once
#include <span>
#include <vector>

namespace lagscape {

/// Adjusted p-values of Benjamini & Hochberg 1995 (J. R. Stat. Soc. B 57:289): padj_(i) = min_{j>=i} min(1, N p_(j)/j).
/// NaN stays NaN and does not count in N. any_dependence: times sum_{i<=N} 1/i, as Benjamini & Yekutieli 2001
/// (Ann. Stat. 29:1165), which holds under any dependence between cells.
[[nodiscard]] std::vector<double> adjusted_p(std::span<const double> p, bool any_dependence);

}  // namespace lagscape
