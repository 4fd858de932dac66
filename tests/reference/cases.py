"""The cases of cases.json for the generators: tables as arrays, plans with their defaults laid under them."""

import csv
import json
import pathlib

import numpy as np

HERE = pathlib.Path(__file__).resolve().parent
DEFAULTS = {
    "curves": {"shape": "smooth", "smoothness": "per-group"},
    "subjects": "intercept",
    "subjects_spread": "common",
    "clusters": "auto",
    "errors": {"serial": "none", "spread": "common", "nugget": False},
}


def merged(under, over):
    """`over` laid on `under`: objects key by key, everything else replaced."""
    if not (isinstance(under, dict) and isinstance(over, dict)):
        return over
    return under | {key: merged(under.get(key), value) for key, value in over.items()}


def plans():
    """Pairs of table name and whole plan, by the name of the case."""
    every = json.loads((HERE / "cases.json").read_text(encoding="utf-8"))
    found = {}
    for name, case in every["cases"].items():
        plan = merged(DEFAULTS, every["base"])
        for over in (every["tables"].get(case["table"], {}), case["plan"]):
            plan = merged(plan, over)
        found[name] = (case["table"], plan)
    return found


def read(table, plan):
    """Subject, group number, time and response of a table's rows, and the groups in order of first appearance."""
    with open(HERE / "data" / f"{table}.csv", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    column = plan["columns"]["group"]
    group = [row[column] if column else "all" for row in rows]
    names = list(dict.fromkeys(group))
    return {
        "subject": np.array([row["subject"] for row in rows]),
        "group": np.array([names.index(g) for g in group]),
        "names": names,
        "t": np.array([float(row["time"]) for row in rows]),
        "y": np.array([float(row["y"]) for row in rows]),
    }


def write(file, rows):
    """Writes one file of expected values."""
    with open(HERE / "expected" / file, "w", encoding="utf-8", newline="\n") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(("case", "quantity", "group", "time", "value"))
        writer.writerows(rows)
