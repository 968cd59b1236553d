"""The script a practitioner writes today: pandas to read, numpy.histogram2d to bin, Generator.dirichlet to sample.

peer.py tally EVENTS EDGES.json OUT.npy       counts [column, outcome] with below, above and lost
peer.py ensemble COUNTS.npy REPLICAS OUT.npy  replicas [replica, column, outcome]
peer.py kernel COUNTS.npy REPLICAS            prints the seconds of sampling alone
"""
import json
import sys
import time

import numpy as np


def tally(events, edges_path, out):
    import pandas as pd

    edges = json.load(open(edges_path))
    frame = pd.read_csv(events)
    frame = frame[frame["quality"] >= 1]
    t, r = frame["t"].to_numpy(), frame["r"].to_numpy()
    lost = np.isnan(r)
    te = np.concatenate([[-np.inf], edges["true"], [np.inf]])
    re = np.concatenate([[-np.inf], edges["reconstructed"], [np.inf]])
    seen, _, _ = np.histogram2d(t[~lost], r[~lost], bins=[te, re])
    missed, _ = np.histogram(t[lost], bins=te)
    np.save(out, np.concatenate([seen, missed[:, None]], axis=1).astype(np.int64))


def draw(counts_path, replicas):
    alpha = np.load(counts_path) + 0.5
    rng = np.random.default_rng(1)
    matrix = np.empty((replicas, *alpha.shape))
    for j, row in enumerate(alpha):
        matrix[:, j, :] = rng.dirichlet(row, size=replicas)
    return matrix


def kernel(counts_path, replicas):
    draw(counts_path, 8)
    best = float("inf")
    for _ in range(3):
        start = time.perf_counter()
        draw(counts_path, replicas)
        best = min(best, time.perf_counter() - start)
    print(best)


if __name__ == "__main__":
    what, *rest = sys.argv[1:]
    if what == "tally":
        tally(*rest)
    elif what == "ensemble":
        np.save(rest[2], draw(rest[0], int(rest[1])))
    elif what == "kernel":
        kernel(rest[0], int(rest[1]))
