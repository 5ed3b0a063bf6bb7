#!/usr/bin/env python3
"""Transport costs by programs that have nothing to do with barrow.

  python3 lp.py FOLDER...                  scipy's HiGHS
  python3 lp.py --lemon ./lemon FOLDER...  LEMON's NetworkSimplex, for large sets

Each FOLDER holds edges.csv (from,to,length) and samples.csv (sample,node,value),
and a file DIRECTED where its edges are one-way. For a few pairs of samples,
chosen by a portable generator, one line is printed:

  set,a,b,directed,distance,method

distance is the least sum of length times flow that turns the shares of sample a
into those of b. HiGHS works in floating point: its tolerances are set to the
finest, lengths and masses scaled so that these are small beside both, and the
value is refused unless a bound from the dual closes to 1e-10. LEMON works on
whole numbers that are exact multiples of the decimals in the files, so its
value is exact before the final division.
"""
import argparse
import csv
import math
import os
import subprocess
import sys
import tempfile
from fractions import Fraction


def park_miller(seed):
    """Park and Miller 1988: s <- 16807 s mod 2^31-1."""
    while True:
        seed = seed * 16807 % 2147483647
        yield seed


def choose(names, count):
    """count pairs of different names, none twice, the same on any machine."""
    draw, pairs = park_miller(1), []
    while len(pairs) < min(count, len(names) * (len(names) - 1) // 2):
        a, b = names[next(draw) % len(names)], names[next(draw) % len(names)]
        if a != b and (a, b) not in pairs and (b, a) not in pairs:
            pairs.append((a, b))
    return pairs


def rows(folder, name):
    with open(os.path.join(folder, name), newline="") as f:
        yield from csv.DictReader(f)


class Set:
    """A network and its samples; every number as the exact decimal it is."""

    def __init__(self, folder):
        self.name = os.path.basename(os.path.normpath(folder))
        self.directed = os.path.exists(os.path.join(folder, "DIRECTED"))
        self.node = {r["node"]: i for i, r in enumerate(rows(folder, "nodes.csv"))}
        self.edges = [(self.node[r["from"]], self.node[r["to"]], Fraction(r["length"]))
                      for r in rows(folder, "edges.csv")]
        self.samples = {}
        for r in rows(folder, "samples.csv"):
            value = Fraction(r["value"])
            if value:
                self.samples.setdefault(r["sample"], {})[self.node[r["node"]]] = value

    def supply(self, a, b):
        """Shares of a minus shares of b, by node."""
        p, q = self.samples[a], self.samples[b]
        total_p, total_q = sum(p.values()), sum(q.values())
        return [p.get(v, 0) / total_p - q.get(v, 0) / total_q for v in range(len(self.node))]


def by_highs(s, supply):
    import numpy as np
    from scipy.optimize import linprog
    from scipy.sparse import coo_matrix

    arcs = [(u, v, l) for u, v, l in s.edges]
    if not s.directed:
        arcs += [(v, u, l) for u, v, l in s.edges]
    # The tolerances of HiGHS are absolute: make the shortest length 1, the
    # moved mass 1000.
    unit = min(l for _, _, l in arcs)
    moved = sum(abs(x) for x in supply) / 2
    cost = np.array([float(l / unit) for _, _, l in arcs])
    b = np.array([float(1000 * x / moved) for x in supply])
    m = len(arcs)
    at = np.arange(m)
    tail, head = np.array([u for u, _, _ in arcs]), np.array([v for _, v, _ in arcs])
    a = coo_matrix((np.r_[np.ones(m), -np.ones(m)], (np.r_[tail, head], np.r_[at, at])),
                   shape=(len(supply), m)).tocsr()
    r = linprog(cost, A_eq=a, b_eq=b, bounds=(0, None), method="highs",
                options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10})
    if r.status != 0:
        sys.exit(f"{s.name}: {r.message}")
    upper = math.fsum(cost * r.x)
    # A potential that falls by at most `excess` too much along some edge is
    # feasible once divided by 1 + excess: the shortest length is 1.
    phi = r.eqlin.marginals
    excess = max(0.0, float(np.max(phi[tail] - phi[head] - cost)))
    lower = math.fsum(phi * b) / (1 + excess)
    if not abs(upper - lower) <= 1e-10 * upper:
        sys.exit(f"{s.name}: between {lower} and {upper}: not close enough")
    return float(Fraction(upper) * unit * moved / 1000)


def whole(numbers):
    """The least multiple that makes all numbers whole."""
    return math.lcm(*{x.denominator for x in numbers})


def by_lemon(s, supply, lemon):
    length, mass = whole([l for _, _, l in s.edges]), whole(supply)
    integers = [int(x * mass) for x in supply]
    common = math.gcd(*integers)
    if sum(map(abs, integers)) // common >= 2**61:
        sys.exit(f"{s.name}: masses need more than 61 bits")
    with tempfile.NamedTemporaryFile("w", suffix=".txt") as f:
        f.write(f"{len(supply)} {len(s.edges)}\n")
        f.writelines(f"{u} {v} {int(l * length)} {int(s.directed)}\n" for u, v, l in s.edges)
        f.writelines(f"{x // common}\n" for x in integers)
        f.flush()
        out = subprocess.run([lemon, "network-simplex", f.name], stdout=subprocess.PIPE, check=True, text=True)
    return float(Fraction(int(out.stdout.split()[0])) * common / mass / length)


def main():
    p = argparse.ArgumentParser()
    p.add_argument("--pairs", type=int, default=8)
    p.add_argument("--lemon", help="the driver built from benchmarks/exact/lemon/lemon.cc")
    p.add_argument("folder", nargs="+")
    args = p.parse_args()
    print("set,a,b,directed,distance,method")
    for folder in args.folder:
        s = Set(folder)
        for a, b in choose(list(s.samples), args.pairs):
            supply = s.supply(a, b)
            if args.lemon:
                d, method = by_lemon(s, supply, args.lemon), "LEMON 1.3.1 NetworkSimplex"
            else:
                d, method = by_highs(s, supply), "scipy 1.10.1 HiGHS"
            print(f"{s.name},{a},{b},{str(s.directed).lower()},{d!r},{method}", flush=True)


if __name__ == "__main__":
    main()
