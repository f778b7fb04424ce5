"""Works the profiles, sign tests and scores of tests/experiment_analysis.rs out once more, by array arithmetic in NumPy.

usage: python3 tests/check_profiles.py FOLDER     with runs.csv and found.csv, as that test writes them

Definitions: E. D. Dolan & J. J. More, Math. Program. 91 (2002) 201-213, doi:10.1007/s101070100263; J. J. More & S. M. Wild,
SIAM J. Optim. 20 (2009) 172-191, doi:10.1137/080724083, equations (2.2) and (2.4).
"""

import csv
import sys
from math import comb
from pathlib import Path

import numpy as np

TAU, CAP = 1e-3, 10.0
folder = Path(sys.argv[1])
runs = list(csv.DictReader(open(folder / "runs.csv")))
found = list(csv.DictReader(open(folder / "found.csv")))

contenders = sorted({r["contender"] for r in runs})
instances = sorted({(r["problem"], int(r["n"]), int(r["start"])) for r in runs})
where = {name: i for i, name in enumerate(contenders)}
place = {key: i for i, key in enumerate(instances)}
at = np.array([place[r["problem"], int(r["n"]), int(r["start"])] for r in runs])
who = np.array([where[r["contender"]] for r in runs])
column = lambda name: np.array([float(r[name]) for r in runs])
value, start = column("value"), column("start_value")
least = np.array([value[at == i].min() for i in range(len(instances))])[at]
SOLVED = {
    "converged": column("converged") == 1,
    "decrease": start - value >= (1 - TAU) * (start - least),
}
sizes = np.array([n for _, n, _ in instances])
problems = sorted({key[:2] for key in instances})


def table(measure, solved):
    """Median cost by instance and contender, infinite where not solved."""
    cost = np.where(SOLVED[solved], column(measure), np.inf)
    shape = (len(instances), len(contenders))
    return np.array([[np.median(cost[(at == i) & (who == j)]) for j in range(shape[1])] for i in range(shape[0])])


checked = {}
for measure in ("calls", "iterations", "seconds"):
    for solved in SOLVED:
        with np.errstate(invalid="ignore"):
            cost = table(measure, solved)
            cheapest = cost.min(axis=1, keepdims=True)
            ratio = np.where(np.isfinite(cost), cost / cheapest, np.inf)
        over = {"ratio": ratio, "cost": cost, "simplex": cost / (sizes[:, None] + 1.0)}
        mine = [row for row in found if row["measure"] == measure and row["solved"] == solved]
        for row in mine:
            what, number = row["what"], float(row["number"])
            a = where[row["first"]]
            if what in over:
                # Jumps are compared a hair to the right, since the division may round differently.
                expected = np.mean(over[what][:, a] <= float(row["at"]) * (1 + 1e-12))
                tolerance = 1e-12
            elif what == "sign":
                b = where[row["second"]]
                lead = {p: 0 for p in problems}
                for key, x, y in zip(instances, cost[:, a], cost[:, b]):
                    lead[key[:2]] += int(x < y) - int(y < x)
                wins, losses = (sum(v > 0 for v in lead.values()), sum(v < 0 for v in lead.values()))
                assert wins == int(row["at"]), row
                games = wins + losses
                tail = sum(comb(games, k) for k in range(min(wins, losses) + 1)) / 2**games
                expected, tolerance = min(1.0, 2 * tail), 1e-12
            else:
                assert int(row["at"]) == np.isfinite(cost[:, a]).sum(), row
                some = np.isfinite(cheapest[:, 0])
                expected, tolerance = np.exp(np.log(np.minimum(ratio[some, a], CAP)).mean()), 1e-12
            assert abs(number - expected) <= tolerance * max(1.0, abs(expected)), (row, expected)
            checked[what] = checked.get(what, 0) + 1
        # Every jump must be there: as many as different finite numbers.
        for what, numbers in over.items():
            for name, j in where.items():
                finite = numbers[np.isfinite(numbers[:, j]), j]
                jumps = sum(row["what"] == what and row["first"] == name for row in mine)
                assert jumps == len(np.unique(finite)), (what, measure, solved, name)

assert set(checked) == {"ratio", "cost", "simplex", "sign", "score"}, checked
print("profiles agree with NumPy:", checked)
