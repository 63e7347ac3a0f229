"""The oracle against values that two other programs computed, so that it is not merely another opinion.

reference_values.csv (R and Python; direct formulas agree to 2e-12), theory_exact.csv and toy_checks.csv.
"""
import csv
import unittest

import numpy as np

import check
import oracle


def table(name):
    with open(check.REFERENCE / name) as file:
        return list(csv.DictReader(file))


VALUES = {(row["dataset"], row["quantity"], row["lag"]): float(row["value_py"] or row["value_R"])
          for row in table("reference_values.csv")}
TOYS = {(row["case"], row["quantity"], row["index"]): float(row["value"]) for row in table("toy_checks.csv")}


def column(name, key):
    return np.array([np.nan if row[key] == "NA" else float(row[key]) for row in table(name)])


class OracleTest(unittest.TestCase):
    def near(self, found, dataset, quantity, lag="", relative=1e-9):
        expected = VALUES[(dataset, quantity, str(lag))]
        self.assertLessEqual(abs(found - expected), relative * abs(expected) + 1e-12,
                             f"{dataset} {quantity} {lag}: {found}, {expected}")

    def memory(self, dataset, residual, acf_lags=20):
        acf = oracle.Correlogram(residual)
        pacf = acf.partial(20)
        for k in range(1, acf_lags + 1):
            self.near(acf.r[k], dataset, "acf_biased", k)
            self.near(pacf[k], dataset, "pacf_yw", k)
        self.near(oracle.crossing(acf.r, np.exp(-1), acf.end), dataset, "tau_efold")
        self.near(oracle.crossing(acf.r, 0.0, acf.end), dataset, "lag_zero_cross")
        lag = {quantity: key for (name, quantity, key) in VALUES if name == dataset and quantity.startswith("tau_int")}
        self.near(2 * oracle.integral(acf.r, acf.end)[0], dataset, "tau_int_first_nonpos", lag["tau_int_first_nonpos"])
        self.near(oracle.geyer(acf.r, acf.end)[0], dataset, "tau_int_geyer_ims", lag["tau_int_geyer_ims"])
        self.near(oracle.sokal(acf.r, acf.end)[0], dataset, "tau_int_sokal_c5", lag["tau_int_sokal_c5"])
        return acf

    def test_complete_series_agree_with_the_reference(self):
        for name in ("LakeHuron", "Nile", "nottem", "lynx", "sunspot.year", "treering"):
            x = column(f"{name}.csv", "x")
            acf = self.memory(name, x)
            limit = acf.bartlett(1.0)
            for k in range(1, 21):
                self.near(limit[k], name, "bartlett_se", k)
            fits = oracle.segment_burg(x, 20)
            for k in range(1, 21):
                self.near(fits[k][0][-1], name, "pacf_burg[py only]", k)

    def test_series_with_gaps_agree_with_the_reference(self):
        months = np.arange(1236) % 12
        complete = {row: f"S{row}" for row in ("053005", "050848", "053662", "057337", "054770")}
        for station, key in {**complete, "051440": "S051440"}.items():
            file = "colorado_tmin_monthly_gappy.csv" if station == "051440" else "colorado_tmin_monthly_5st.csv"
            fit = oracle.Fit(column(file, key), oracle.Axis(seasons=months))
            self.near(fit.slope, f"CO_S{station}", "joint_slope_per_month")
            self.near(np.sqrt(fit.sse / (fit.m - fit.q) * fit.spread), f"CO_S{station}", "ols_se_iid_joint")
            self.memory(f"CO_S{station}", fit.residual)

    def test_daily_harmonics_agree_with_the_reference(self):
        for name in ("VAL", "DUB", "BIR", "MAL"):
            x = column("irish_wind_daily_knots.csv", name)
            fit = oracle.Fit(x, oracle.Axis(phases=np.arange(len(x)) / 365.25, steps_per_year=365.25, harmonics=3))
            self.near(fit.slope, f"wind_{name}", "joint_slope_per_day")
            self.near(np.sqrt(fit.sse / (fit.m - fit.q) * fit.spread), f"wind_{name}", "ols_se_iid_joint")
            self.memory(f"wind_{name}", fit.residual)

    def test_models_have_their_known_decorrelation_times(self):
        for row in table("theory_exact.csv"):
            model = row["model"]
            if not model.startswith("AR"):
                continue
            if not model[2] in "12":
                continue
            f = np.array([float(part) for part in model[4:-1].replace(";", ",").split(",")])
            if row["quantity"] == "tau_int":
                self.assertAlmostEqual(np.exp(oracle.ln_tau(f)) / float(row["value"]), 1, places=12)
            if row["quantity"] == "acf":
                self.assertAlmostEqual(oracle.model_acf(f, int(row["lag"]) + 1)[int(row["lag"])], float(row["value"]), places=12)

    def test_gap_free_bias_is_that_of_the_literature(self):
        # Marriott and Pope (1954): -(1 + 3 f) / n with the mean removed; with mean and trend -(2 + 4 f) / n.
        for f in (-0.4, 0.0, 0.3, 0.9):
            self.assertAlmostEqual(oracle.bias_times_n(np.array([f]), [])[0], -(1 + 3 * f), places=12)
            self.assertAlmostEqual(oracle.bias_times_n(np.array([f]), [0.0])[0], -(2 + 4 * f), places=12)

    def test_season_columns_count_for_little_bias_at_low_order(self):
        # n times the bias with twelve months and a trend, measured in 20 000 simulated series of 240 months: -2.02 at .3,
        # -3.20 at .6, -5.16 at .9 (the formula stays within .5 of them).
        months = oracle.Axis(seasons=np.arange(240) % 12).frequencies(True)
        for f, formula in ((0.3, -1.90), (0.6, -2.83), (0.9, -4.70)):
            self.assertAlmostEqual(oracle.bias_times_n(np.array([f]), months)[0], formula, delta=0.006)
        for pair, formula in (((0.5, 0.3), (-2.05, -3.91)), ((1.2, -0.5), (-1.92, 0.20))):
            self.assertLess(np.max(np.abs(oracle.bias_times_n(np.array(pair), months) - formula)), 0.006)

    def test_inflation_of_a_complete_record_is_exact(self):
        for n, f in ((50, 0.3), (100, 0.6), (100, 0.9), (500, 0.9)):
            expected = TOYS[(f"AR1 n={n} phi={f} sigma_e=1", "var_inflation_mean_exact n/n_eff", "")]
            found = oracle.variance_inflation(n - np.arange(n), oracle.model_acf(np.array([f]), n - 1), n)
            self.assertAlmostEqual(found, expected, places=10)

    def test_adjusted_p_values_are_those_of_the_publication(self):
        # The 15 p-values of Benjamini and Hochberg (1995), section 3.2.
        case = next(name for name, _, _ in TOYS if name.startswith("BH1995"))
        p = [float(word) for word in case.split("=")[1].split()]
        for rule in ("bh", "by"):
            found = oracle.adjusted(np.array([np.nan, *p]), rule)
            self.assertTrue(np.isnan(found[0]))
            for i in range(15):
                self.assertAlmostEqual(found[i + 1], TOYS[(case, f"{rule.upper()}_adjusted", str(i + 1))], places=12)


if __name__ == "__main__":
    unittest.main()
