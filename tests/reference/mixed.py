"""Straight-line mixed models by statsmodels MixedLM (REML): writes expected/mixed.csv."""

import csv
import pathlib
import warnings

import numpy as np
import pandas as pd
import statsmodels.api as sm

HERE = pathlib.Path(__file__).resolve().parent


def main():
    rows = [("case", "quantity", "group", "time", "value")]
    for name in ("sleepstudy", "dietox", "sitka1988"):
        table = pd.read_csv(HERE / "data" / f"{name}.csv")
        group = table["group"].astype(str) if "group" in table else pd.Series("all", index=table.index)
        names = list(dict.fromkeys(group))
        design = np.column_stack([f(g) for g in names for f in (
            lambda g: (group == g) * 1.0, lambda g: (group == g) * table["time"])])
        for effects in ("intercept", "slope"):
            random = np.ones((len(table), 1)) if effects == "intercept" else np.column_stack(
                [np.ones(len(table)), table["time"] - table["time"].min()])
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                model = sm.MixedLM(table["y"].to_numpy(), design, table["subject"].to_numpy(), random)
                best = None
                for method in ("lbfgs", "powell", "bfgs"):
                    fit = model.fit(reml=True, method=method, maxiter=2000)
                    if best is None or fit.llf > best.llf:
                        best = fit
            case = f"{name}.straight.{effects}"
            rows.append((case, "log_reml", "", "", repr(float(best.llf))))
            rows.append((case, "residual_sd", names[0], "", repr(float(np.sqrt(best.scale)))))
            rows.append((case, "sd_level", names[0], "", repr(float(np.sqrt(np.asarray(best.cov_re)[0, 0])))))
            for k, g in enumerate(names):
                for t in (float(table["time"].min()), float(table["time"].max())):
                    x = np.zeros(design.shape[1])
                    x[2 * k], x[2 * k + 1] = 1, t
                    covariance = np.asarray(best.cov_params())[: len(x), : len(x)]
                    rows.append((case, "mean", g, repr(t), repr(float(x @ best.fe_params))))
                    rows.append((case, "se", g, repr(t), repr(float(np.sqrt(x @ covariance @ x)))))
    with open(HERE / "expected" / "mixed.csv", "w", encoding="utf-8", newline="\n") as file:
        csv.writer(file, lineterminator="\n").writerows(rows)


if __name__ == "__main__":
    main()
