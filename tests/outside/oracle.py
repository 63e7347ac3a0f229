"""Every estimate of one series, written from the published formulas in plain numpy, scipy and statsmodels.

It shares nothing with the program it checks: one cell at a time, no thought of speed, its own algorithms where there is
a choice (pivoted least squares instead of normal equations, numeric instead of analytic derivatives).

Where the formulas leave a choice open, the choice taken is marked "Choice:".
"""
import numpy as np
from scipy import linalg, stats
from statsmodels.tsa.stattools import pacf as statsmodels_pacf

# Status bits.
NO_DATA, TOO_FEW, CONSTANT, SEASON, UNIT_ROOT, LAG_RANGE, TIES, GAPS, SHORT = 1, 2, 4, 8, 16, 32, 64, 128, 256


class Axis:
    """What the oracle must know of the time axis: seasons (0 ... 11 per step) or phases of the year (0 ... 1)."""

    def __init__(self, seasons=None, phases=None, steps_per_year=12.0, harmonics=4):
        self.seasons = None if seasons is None else np.asarray(seasons)
        self.phases = None if phases is None else np.asarray(phases)
        self.n = len(self.seasons if phases is None else self.phases)
        self.steps_per_year, self.harmonics = steps_per_year, harmonics

    def season_columns(self):
        """Design columns of the season for a complete record; they span the constant."""
        if self.seasons is not None:
            return np.column_stack([(self.seasons == s).astype(float) for s in range(12)])
        waves = [f(2 * np.pi * h * self.phases) for h in range(1, self.harmonics + 1) for f in (np.cos, np.sin)]
        return np.column_stack([np.ones(self.n), *waves])

    def frequencies(self, line):
        """Frequency of every design column beside the mean: straight line, season (for the bias of AR coefficients)."""
        trend = [0.0] if line else []
        if self.seasons is not None:
            return trend + [2 * np.pi * h / 12 for h in range(1, 6) for _ in range(2)] + [np.pi]
        return trend + [2 * np.pi * h / self.steps_per_year for h in range(1, self.harmonics + 1) for _ in range(2)]


class Settings:
    """The keys of a job that the estimates depend on, with the program's defaults."""
    max_lag, max_order, confidence, alpha = 24, 10, 0.95, 0.05
    min_share, min_count, share_of = 0.8, 30, "span"
    remove, limits, order = "linear", "bartlett", "bic"

    def __init__(self, **keys):
        for key, value in keys.items():
            assert hasattr(self, key), key
            setattr(self, key, value)


# --- preparation: one least-squares fit of season and, where asked for, straight line to the values there are ----------

class Fit:
    def __init__(self, x, axis, with_line=True):
        valid = np.isfinite(x)
        design = axis.season_columns()
        self.dropped = 0
        if axis.seasons is not None:  # a month with a single value cannot be told from its own mean: it is dropped
            for month in range(12):
                here = valid & (axis.seasons == month)
                if here.sum() == 1:
                    valid = valid & ~here
                    self.dropped += 1
            design = design[:, [np.sum(valid & (axis.seasons == s)) > 0 for s in range(12)]]
        self.seasons_left = design.shape[1] if axis.seasons is not None else 2
        self.valid, self.m = valid, int(valid.sum())
        t = np.arange(axis.n, dtype=float)
        line = (t - t[valid].mean()) / axis.n
        full = np.column_stack([design, line] if with_line else [design])
        rows, y = full[valid], x[valid]
        q_matrix, r_matrix, order = linalg.qr(rows, mode="economic", pivoting=True)
        self.q = rows.shape[1]
        coefficients = np.empty(self.q)
        coefficients[order] = linalg.solve_triangular(r_matrix, q_matrix.T @ y)
        inverse = np.empty((self.q, self.q))
        inverse[np.ix_(order, order)] = np.linalg.inv(r_matrix.T @ r_matrix)
        seasons = design.shape[1]
        if with_line:
            self.slope = coefficients[-1] / axis.n              # per step
            self.spread = inverse[-1, -1] / axis.n**2           # [(X'X)^-1] of the slope
        self.residual = np.where(valid, x - full @ coefficients, np.nan)
        self.sse = float(np.nansum(self.residual**2))
        self.mean = float(y.mean())
        # Choice: what season and trend each explain is the variance of its fitted part over the valid steps, as a share of
        # the variance of the values.
        total = np.mean((y - self.mean) ** 2)
        self.season_share = np.var(rows[:, :seasons] @ coefficients[:seasons]) / total
        self.trend_share = np.var(rows[:, seasons:] @ coefficients[seasons:]) / total


# --- autocorrelation -------------------------------------------------------------------------------------------------

class Correlogram:
    """r_k = c_k / c_0, c_k = S_k / (nu_k + k): Parzen (1963) with the denominator that gives 1/n for a complete record."""

    def __init__(self, residual):
        valid = np.isfinite(residual)
        d = np.where(valid, residual - residual[valid].mean(), 0.0)
        a = valid.astype(float)
        n, m = len(d), int(valid.sum())
        lags = np.arange(n)
        self.n, self.m = n, m
        self.sums = np.array([d[: n - k] @ d[k:] for k in lags])
        self.pairs = np.array([round(a[: n - k] @ a[k:]) for k in lags])
        self.covariance = self.sums / (self.pairs + lags)
        self.r = self.covariance / self.covariance[0]
        few = self.pairs < max(10, m / 10)  # a lag with too few pairs is missing
        self.r[few] = np.nan
        self.covariance[few] = np.nan
        self.psd = self.sums / self.sums[0]
        # The scan ends at n/2 or before the first missing lag.
        self.end = n // 2
        missing = np.flatnonzero(np.isnan(self.r[: self.end + 1]))
        self.cut = len(missing) > 0
        if self.cut:
            self.end = int(missing[0]) - 1

    def bartlett(self, z):
        """Bartlett (1946): limit at lag k under an MA(k - 1). With gaps n is the number of pairs, nu_k."""
        # Choice: a lag that is missing adds nothing to the limits of longer ones.
        r2 = np.concatenate([[0.0, 0.0], np.cumsum(np.nan_to_num(self.r[1:]) ** 2)])[: self.n]
        limit = z * np.sqrt((1 + 2 * r2) / (self.n if self.m == self.n else np.maximum(self.pairs, 1)))
        limit[np.isnan(self.r)] = np.nan
        limit[0] = np.nan
        return limit

    def partial(self, longest):
        """Durbin-Levinson on r; on the positive semi-definite S_k / S_0 if a partial autocorrelation leaves (-1, 1)."""
        found = durbin_levinson(self.r, min(longest, self.end))
        if np.any(np.abs(found) >= 1):
            found = durbin_levinson(self.psd, min(longest, self.end))
        return np.concatenate([[np.nan], found, np.full(longest - len(found), np.nan)])


def durbin_levinson(r, longest):
    f, out = np.zeros(0), []
    for k in range(1, longest + 1):
        top = r[k] - sum(f[j - 1] * r[k - j] for j in range(1, k))
        bottom = 1 - sum(f[j - 1] * r[j] for j in range(1, k))
        last = top / bottom
        f = np.concatenate([f - last * f[::-1], [last]])
        out.append(last)
    return np.array(out)


# --- autoregression ---------------------------------------------------------------------------------------------------

def segment_burg(residual, longest):
    """Burg's recursion pooled over gap-free stretches; returns per order: coefficients, s2_p / s2_0, usable terms."""
    valid = np.isfinite(residual)
    d = np.where(valid, residual - residual[valid].mean(), 0.0)
    n = len(d)
    forward, backward = d.copy(), d.copy()
    usable = valid.copy()
    a, share = np.zeros(0), 1.0
    found = [(a, share, int(valid.sum()))]
    for p in range(1, longest + 1):
        usable_now = np.zeros(n, bool)
        usable_now[p:] = usable[p:] & valid[: n - p]
        ahead, behind = np.zeros(n), np.zeros(n)
        t = np.flatnonzero(usable_now)
        bottom = np.sum(forward[t] ** 2 + backward[t - 1] ** 2)
        if bottom <= 0:
            break
        k = 2 * np.sum(forward[t] * backward[t - 1]) / bottom
        ahead[1:] = forward[1:] - k * backward[:-1]
        behind[1:] = backward[:-1] - k * forward[1:]
        forward, backward, usable = ahead, behind, usable_now
        a = np.concatenate([a - k * a[::-1], [k]])
        share *= 1 - k * k
        found.append((a, share, len(t)))
    return found


def partials(f):
    """Partial autocorrelations of AR coefficients, by the backward recursion."""
    f, out = np.array(f, float), []
    while len(f):
        k = f[-1]
        out.append(k)
        f = (f[:-1] + k * f[:-1][::-1]) / (1 - k * k)
    return np.array(out[::-1])


def model_acf(f, longest):
    """rho_0 ... of an AR(p): Yule-Walker equations for the first p, the recursion beyond."""
    p = len(f)
    system, right = np.eye(p), np.zeros(p)
    for i in range(1, p + 1):
        for j in range(1, p + 1):
            if i == j:
                right[i - 1] += f[j - 1]
            else:
                system[i - 1, abs(i - j) - 1] -= f[j - 1]
    rho = np.concatenate([[1.0], np.linalg.solve(system, right), np.zeros(max(0, longest - p))])
    for k in range(p + 1, longest + 1):
        rho[k] = f @ rho[k - p : k][::-1]
    return rho[: longest + 1]


MEAN_ROW = {1: ([1], [[3]]), 2: ([1, 2], [[1, 1], [0, 4]]), 3: ([1, 2, 1], [[1, 0, 2], [-1, 4, 1], [0, 0, 5]])}


def bias_times_n(f, frequencies):
    """n times the bias of AR coefficients of a residual: the mean (Shaman and Stine 1988), then each further column."""
    p = len(f)
    c, b = (np.array(part, float) for part in MEAN_ROW[p])
    bias = -(c + b @ f)
    rho = model_acf(f, p)
    noise = 1 - f @ rho[1:]  # s2_e / gamma_0
    toeplitz = linalg.toeplitz(rho[:p])
    k = np.arange(p + 1)
    for w in frequencies:
        g = noise / abs(1 - np.sum(f * np.exp(-1j * w * k[1:]))) ** 2
        dg = -g * np.cos(w * k)
        bias += np.linalg.solve(toeplitz, dg[1:] - linalg.toeplitz(dg[:p]) @ f)
    return bias


def corrected(f_hat, m, frequencies):
    """Bias-corrected coefficients and whether a bound of stationarity was met. Three fixed-point steps."""
    p = len(f_hat)
    if p > 3:
        return f_hat, False
    if p == 1:  # only the cap .99
        if abs(f_hat[0]) >= 1:  # with gaps r_1 may leave (-1, 1), where no AR(1) exists and (1 + f) / (1 - f) has the wrong sign
            return np.clip(f_hat, -0.99, 0.99), True
        if abs(f_hat[0]) >= 0.99:
            return f_hat, True
        f = f_hat
        for _ in range(3):
            f = np.clip(f_hat - bias_times_n(f, frequencies) / m, -0.99, 0.99)
        return f, bool(abs(f[0]) >= 0.99)

    def outside(f):
        return bool(np.any(np.abs(partials(f)) >= 0.995) or f.sum() > 0.985)

    if outside(f_hat):
        return f_hat, True
    f = f_hat
    for _ in range(3):
        f = f_hat - bias_times_n(f, frequencies) / m
    shrunk = 1.0
    while outside(f_hat + shrunk * (f - f_hat)):
        shrunk -= 0.02
    return f_hat + shrunk * (f - f_hat), shrunk < 1


def ln_tau(f):
    """ln of the decorrelation time of an AR(p): spectral density at zero over variance."""
    return np.sum(np.log(1 - partials(f) ** 2)) - 2 * np.log(1 - np.sum(f))


def ln_tau_error(f, terms):
    """Delta method with V = (s2_e / gamma_0) R^-1 / terms and numeric derivatives."""
    p, step = len(f), 1e-5
    gradient = np.array([(ln_tau(f + step * e) - ln_tau(f - step * e)) / (2 * step) for e in np.eye(p)])
    rho = model_acf(f, p)
    v = (1 - f @ rho[1:]) * np.linalg.inv(linalg.toeplitz(rho[:p])) / terms
    return float(np.sqrt(gradient @ v @ gradient))


# --- decorrelation times by other definitions, in steps ---------------------------------------------------------------

def crossing(r, level, end):
    """Lag at which r falls to the level, between lags by a straight line."""
    for k in range(1, end + 1):
        if r[k] <= level:
            return (k - 1) + (r[k - 1] - level) / (r[k - 1] - r[k])
    return np.nan


def integral(r, end):
    """1/2 + the sum up to the last lag before r <= 0: the one-sided scale, half of 1 + 2 sum.

    The sums tell whether they were finished: else the scan ended first, and they are lower bounds.
    """
    for k in range(1, end + 1):
        if r[k] <= 0:
            return 0.5 + float(np.sum(r[1:k])), True
    return 0.5 + float(np.sum(r[1 : end + 1])), False


def geyer(r, end):
    """Geyer (1992), initial monotone sequence.  Choice: of his two sums this one, two-sided."""
    total, smallest = 0.0, np.inf
    for j in range(0, (end + 1) // 2):
        pair = r[2 * j] + r[2 * j + 1]
        if pair <= 0:
            return -1 + 2 * total, True
        smallest = min(smallest, pair)
        total += smallest
    return -1 + 2 * total, False


def sokal(r, end):
    """Madras and Sokal (1988): window W, the smallest with W >= 5 tau_half(W); two-sided."""
    half = 0.5
    for window in range(1, end + 1):
        half += r[window]
        if window >= 5 * half:
            return 2 * half, True
    return 2 * half, False


# --- one cell ---------------------------------------------------------------------------------------------------------

def longest_run(flags):
    best = run = 0
    for flag in flags:
        run = run + 1 if flag else 0
        best = max(best, run)
    return best


def variance_inflation(pairs, rho, m):
    """[m + 2 sum nu_k rho_k] / m over all lags of the record."""
    return (m + 2 * np.sum(pairs[1:] * rho[1:])) / m


def describe(x, settings, axis):
    """What there was to work with, and the status bits that follow from it."""
    valid = np.isfinite(x)
    m = int(valid.sum())
    out = {"valid_count": m, "first": np.nan, "last": np.nan, "longest_gap": np.nan, "valid_share": np.nan}
    if m == 0:
        return out, NO_DATA
    first, last = (int(i) for i in np.flatnonzero(valid)[[0, -1]])
    span = last - first + 1
    share = m / (span if settings.share_of == "span" else len(x))
    out.update(first=first, last=last, span=span, valid_share=share, longest_gap=longest_run(~valid[first : last + 1]))
    y = x[valid]
    status = 0
    parameters = axis.season_columns().shape[1] + 1
    if m < max(settings.min_count, 21, parameters + 10) or share < settings.min_share:
        status |= TOO_FEW
    if share < 0.8:
        status |= GAPS
    if y.max() - y.min() <= 8 * 2.2e-16 * np.max(np.abs(y)):
        status |= CONSTANT
    elif np.max(np.unique(y, return_counts=True)[1]) > m / 2:
        status |= TIES  # Choice: more than half of the values are one and the same
    if span / axis.steps_per_year < 10:
        status |= SHORT
    return out, status


def analyse(x, axis, settings):
    """All estimates of one cell as a dictionary of map names; cubes are arrays. Times are in steps, slopes per step.

    Keys that are left out are missing in the result (the cell has a fatal status).
    """
    out, status = describe(x, settings, axis)
    out["status"] = status
    if status & CONSTANT and not status & TOO_FEW:  # a constant record has a mean and no trend, and that is all
        out.update(mean=x[np.isfinite(x)].mean(), slope=0.0, trend_total=0.0)
    if status & (NO_DATA | TOO_FEW | CONSTANT):
        return out
    line = settings.remove == "linear"
    fit = Fit(x, axis, line)
    if fit.seasons_left < 2:
        out["status"] |= SEASON
        return out
    m, n = fit.m, out["span"]
    z = stats.norm.ppf(0.5 + settings.confidence / 2)
    inside = slice(out["first"], out["last"] + 1)
    acf = Correlogram(fit.residual[inside])
    lags = min(settings.max_lag, acf.n - 1)

    def cube(values):
        return np.concatenate([values[: lags + 1], np.full(settings.max_lag - lags, np.nan)])

    limit = acf.bartlett(z) if settings.limits == "bartlett" else np.where(np.isnan(acf.r), np.nan, z / np.sqrt(m))
    limit[0] = np.nan
    out.update(autocorrelation=cube(acf.r), autocovariance=cube(acf.covariance), pair_count=cube(acf.pairs.astype(float)),
               autocorrelation_limit=cube(limit), partial_autocorrelation=acf.partial(settings.max_lag),
               residual_sd=np.sqrt(fit.sse / (m - fit.q)), variance_share_season=fit.season_share,
               variance_share_trend=fit.trend_share)
    if m == n and settings.max_lag < m // 2:  # a second opinion from a general library, where it can give one
        library = statsmodels_pacf(fit.residual[inside], nlags=settings.max_lag, method="ldb")
        assert np.allclose(library[1:], out["partial_autocorrelation"][1:], rtol=1e-9, atol=1e-11)

    r, end = acf.r, acf.end
    out.update(efolding_time=crossing(r, np.exp(-1), end), zero_crossing_time=crossing(r, 0.0, end))
    finished = []
    for name, rule in (("integral_time", integral), ("geyer_time", geyer), ("sokal_time", sokal)):
        out[name], reached = rule(r, end)
        finished.append(reached)
    # Choice: the first lag at which |r| is not above the limit of the correlogram.
    inside_limits = np.flatnonzero(np.abs(r[1 : end + 1]) <= limit[1 : end + 1])
    out["first_lag_within_limits"] = float(inside_limits[0] + 1) if len(inside_limits) else np.nan
    crossings = ("efolding_time", "zero_crossing_time", "first_lag_within_limits")
    beyond = not all(finished) or any(np.isnan(out[name]) for name in crossings)

    h = min(10, m // 5, end)  # Choice: it ends before a missing lag, as the other sums do
    q_statistic = m * (m + 2) * np.sum(r[1 : h + 1] ** 2 / acf.pairs[1 : h + 1])
    out["ljung_box_p"] = stats.chi2.sf(q_statistic, h)

    frequencies = axis.frequencies(line)
    f1, at_bound = corrected(r[1:2], m, frequencies)
    out.update(lag1_autocorrelation=r[1], lag1_autocorrelation_corrected=f1[0])
    out["ar1_time"] = (1 + f1[0]) / (1 - f1[0])  # Choice: from the corrected coefficient
    at_bound |= autoregression(fit, acf, n, z, frequencies, settings, x[np.isfinite(x)].mean(), out)
    if not line:  # the trend has a fit of its own, with its own residual
        fit = Fit(x, axis)
        r = Correlogram(fit.residual[inside]).r
        f1, trend_at_bound = corrected(r[1:2], m, axis.frequencies(True))
        at_bound |= trend_at_bound
    trend(fit, acf, n, f1[0], settings, out)
    out["status"] |= (UNIT_ROOT if at_bound else 0) | (LAG_RANGE if beyond else 0)
    return out


def autoregression(fit, acf, n, z, frequencies, settings, mean, out):
    """AR(p) by segment Burg with p >= 1; decorrelation time, effective sizes, limits of the mean."""
    m = fit.m
    fits = segment_burg(fit.residual, min(settings.max_order, m // 10))
    offered = [p for p in range(1, len(fits)) if fits[p][2] >= max(20, m / 4)]
    assert offered, "no series of the tests has so many gaps"
    penalty = {"bic": lambda p: p * np.log(m), "aicc": lambda p: 2 * (p + fit.q + 1) * m / (m - p - fit.q - 2)}[settings.order]
    p = min(offered, key=lambda order: m * np.log(fits[order][1]) + penalty(order))
    f_hat, _, terms = fits[p]
    f, at_bound = corrected(f_hat, m, frequencies)
    tau, error = np.exp(ln_tau(f)), ln_tau_error(f, terms)
    out.update(ar_order=p, ar_coefficients=np.concatenate([f, np.zeros(settings.max_order - p)]),
               # Choice: the spread of the innovations that goes with the corrected coefficients and the residual's sd.
               innovation_sd=out["residual_sd"] * np.sqrt(np.prod(1 - partials(f) ** 2)),
               decorrelation_time=np.clip(tau, 1 / n, n / 2),
               decorrelation_time_low=np.clip(tau * np.exp(-z * error), 1 / n, n),
               decorrelation_time_high=np.clip(tau * np.exp(z * error), 1 / n, n))
    rho = model_acf(f, acf.n - 1)
    size = np.clip(m / variance_inflation(acf.pairs, rho, m), 2, m)
    out["effective_sample_size"] = size
    out["effective_sample_size_for_variance"] = np.clip(m / variance_inflation(acf.pairs, rho**2, m), 2, m)
    # Zwiers and von Storch (1995).  Choice: the spread is that of the residual, for the season is not sampling error, with
    # the degrees of freedom of the fit; SSE/m where the mean alone is fitted.
    spread = fit.sse / m * (m - 1) / (m - fit.q)
    half = stats.t.ppf(0.5 + settings.confidence / 2, size - 1) * np.sqrt(spread / (size - 1))
    out["mean"] = mean  # of all valid values, also those of seasons too short to be fitted
    if size >= 10:  # methods: no limits are given for fewer than ten independent values
        out.update(mean_low=mean - half, mean_high=mean + half)
    return at_bound


def trend(fit, acf, n, f, settings, out):
    """Straight line with n_eff (Santer et al. 2000) from the corrected lag-1 autocorrelation, and as if independent."""
    m, q = fit.m, fit.q
    k = np.arange(1, acf.n)
    powers = f**k
    gaps = ((m + 2 * np.sum(acf.pairs[1:] * powers)) / m) / ((n + 2 * np.sum((n - k) * powers)) / n)
    size = np.clip(m * (1 - f) / (1 + f) / gaps, 2, m)
    out["effective_sample_size_for_trend"] = size
    independent = np.sqrt(fit.sse / (m - q) * fit.spread)
    out["trend_p_independent"] = 2 * stats.t.sf(abs(fit.slope) / independent, m - q)
    out.update(slope=fit.slope, trend_total=fit.slope * (n - 1))  # Choice: from the first to the last value
    if size <= 2.05:  # nothing can be said
        out["trend_p"] = 1.0
        return
    error = np.sqrt(fit.sse * (m - 2) / (m - q) / (size - 2) * fit.spread)
    half = stats.t.ppf(0.5 + settings.confidence / 2, size - 2) * error
    out.update(trend_p=2 * stats.t.sf(abs(fit.slope) / error, size - 2), slope_low=fit.slope - half, slope_high=fit.slope + half,
               detectable=(stats.t.ppf(1 - settings.alpha / 2, size - 2) + stats.norm.ppf(0.9)) * error)


# --- over the map -----------------------------------------------------------------------------------------------------

def adjusted(p, rule):
    """Benjamini and Hochberg (1995) or Benjamini and Yekutieli (2001) over the values that are not NaN."""
    p = np.asarray(p, float)
    out = np.full(len(p), np.nan)
    tested = np.flatnonzero(np.isfinite(p))
    count = len(tested)
    factor = count * (np.sum(1 / np.arange(1, count + 1)) if rule == "by" else 1.0)
    order = tested[np.argsort(p[tested], kind="stable")]
    best = 1.0
    for rank in range(count, 0, -1):
        best = min(best, factor * p[order[rank - 1]] / rank)
        out[order[rank - 1]] = best
    return out
