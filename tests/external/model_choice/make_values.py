"""Writes the CSV files of this folder with statsmodels, lmfit and scipy. Run in this folder:

    python3 make_values.py
"""

import csv

import lmfit
import numpy as np
import scipy
import statsmodels
import statsmodels.api as sm
from numpy.polynomial import chebyshev
from scipy import stats
from statsmodels.datasets import nile
from statsmodels.tools.eval_measures import aicc, bic

VERSIONS = (
    f"statsmodels {statsmodels.__version__}, scipy {scipy.__version__}, "
    f"lmfit {lmfit.__version__}, numpy {np.__version__}"
)


def write(name, title, header, rows):
    with open(name, "w", newline="") as f:
        f.write(f"# {title}\n# {VERSIONS}\n")
        out = csv.writer(f, lineterminator="\n")
        out.writerow(header)
        out.writerows([[repr(float(v)) if isinstance(v, float) else v for v in row] for row in rows])


def polynomials():
    """Orders 0 to 6 through the flow of the Nile, with given errors and with one unknown error."""
    data = nile.load_pandas().data
    year, flow = data["year"].to_numpy(float), data["volume"].to_numpy(float)
    # Errors for the case of known errors: 12 % of the flow plus 30, only to have unequal weights.
    sigma = 0.12 * flow + 30.0
    write(
        "nile.csv",
        "Annual flow of the Nile at Aswan, 10^8 m3 (Cobb 1978, Biometrika 65, 243), as in statsmodels; "
        "sigma is 0.12 flow + 30",
        ["year", "flow", "sigma"],
        [[float(y), float(v), float(s)] for y, v, s in zip(year, flow, sigma)],
    )
    t = 2.0 * (year - year[0]) / (year[-1] - year[0]) - 1.0
    n, rows = len(year), []
    before_ols = before_wls = None
    for order in range(7):
        columns = chebyshev.chebvander(t, order)
        ols = sm.OLS(flow, columns).fit()
        wls = sm.WLS(flow, columns, weights=1.0 / sigma**2).fit()
        f_ols = ols.compare_f_test(before_ols) if before_ols is not None else ("", "")
        f_wls = wls.compare_f_test(before_wls) if before_wls is not None else ("", "")
        chi2 = float(np.sum((wls.wresid) ** 2))
        # Known errors: the normal density of every sample with its own error.
        known = float(np.sum(stats.norm.logpdf(flow, wls.fittedvalues, sigma)))
        k = order + 1
        rows.append(
            [order, n]
            + [float(ols.ssr), float(aicc(ols.llf, n, k + 1)), float(bic(ols.llf, n, k + 1))]
            + [float(v) if v != "" else "" for v in f_ols[:2]]
            + [chi2, float(aicc(known, n, k)), float(bic(known, n, k))]
            + [float(v) if v != "" else "" for v in f_wls[:2]]
        )
        before_ols, before_wls = ols, wls
    write(
        "polynomials.csv",
        "Orders through nile.csv: OLS with an unknown error (counted as a parameter) and WLS with the given "
        "ones; F-test against the order before by compare_f_test",
        ["order", "n", "rss", "aicc_unknown", "bic_unknown", "f_unknown", "p_unknown"]
        + ["chi2", "aicc_known", "bic_known", "f_known", "p_known"],
        rows,
    )


def components():
    """None, one and two Gaussians on a cubic continuum through three NIST problems."""
    rows = []
    for problem in ["Gauss1", "Gauss2", "Gauss3"]:
        with open(f"../nist_nls/{problem}.csv") as f:
            table = [(float(r["x"]), float(r["y"])) for r in csv.DictReader(f)]
        x, y = np.array(table).T
        t = 2.0 * (x - x[0]) / (x[-1] - x[0]) - 1.0
        starts = {
            "Gauss1": [(67.0, 20.0), (179.0, 17.0)],
            "Gauss2": [(106.0, 15.0), (153.0, 14.0)],
            "Gauss3": [(112.0, 16.0), (147.0, 14.0)],
        }[problem]
        before = None
        for count in range(3):
            model = lmfit.models.PolynomialModel(degree=3)
            parameters = model.make_params(c0=80, c1=-20, c2=0, c3=0)
            for i in range(count):
                peak = lmfit.models.GaussianModel(prefix=f"g{i}_")
                model = model + peak
                centre, width = starts[i]
                # In the unit of t.
                half = 0.5 * (x[-1] - x[0])
                parameters.update(
                    peak.make_params(amplitude=10, center=(centre - x[0]) / half - 1, sigma=width / half)
                )
            fit = model.fit(y, parameters, x=t, fit_kws={"xtol": 1e-14, "ftol": 1e-14, "gtol": 1e-14})
            n, chi2, dof = len(x), float(fit.chisqr), int(fit.nfree)
            f = p = ""
            if before is not None:
                f = float((before[0] - chi2) / (before[1] - dof) / (chi2 / dof))
                p = float(stats.f.sf(f, before[1] - dof, dof))
            lines = ";".join(f"{c}:{w}" for c, w in starts[:count])
            rows.append([problem, count, lines, n, dof, chi2, float(fit.aic), float(fit.bic), f, p])
            before = (chi2, dof)
    write(
        "components.csv",
        "Gaussians on a cubic through ../nist_nls: chi2, aic and bic of lmfit (unit errors; n ln(chi2/n) + 2k and "
        "+ k ln n, error not counted); F-test against one component less by scipy.stats.f. start is centre:width",
        ["problem", "components", "start", "n", "dof", "chi2", "aic", "bic", "f", "p"],
        rows,
    )


def tails():
    """F-tests over the whole range that fits of spectra meet."""
    cases = [
        (110.0, 91, 93.7, 88), (93.9, 88, 93.2, 85), (1000.0, 100, 10.0, 97), (20.0, 4, 3.0, 1),
        (2001.0, 2003, 2000.0, 2000), (5.0e5, 5010, 5.0e3, 5000), (12.0, 11, 11.5, 10),
        (300.0, 60, 40.0, 48), (1.0e-12, 30, 9.0e-13, 29), (40.0, 7, 2.0, 2),
    ]  # fmt: skip
    rows = []
    for chi1, dof1, chi2, dof2 in cases:
        f = (chi1 - chi2) / (dof1 - dof2) / (chi2 / dof2)
        rows.append([chi1, dof1, chi2, dof2, float(f), float(stats.f.sf(f, dof1 - dof2, dof2))])
    write(
        "f_tests.csv",
        "F-tests between nested models, scipy.stats.f.sf",
        ["chi2_smaller", "dof_smaller", "chi2_larger", "dof_larger", "f", "p"],
        rows,
    )


polynomials()
components()
tails()
