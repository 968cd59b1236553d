"""Folds a spectrum with every replica of a bundle handed over as HDF5 and prints mean and sd of each outcome.

    entasis convert BUNDLE --to hdf5 --out gallery.h5
    python fold_hdf5.py gallery.h5 [SPECTRUM]

SPECTRUM is a text file with one number a line: the expected events of each column in the order of the data set
"columns". Without it, 1000 each. Needs h5py and numpy. The sd is the uncertainty that the calibration's statistics
leave in the folded spectrum: systematic effects are yours to add.
"""

import sys

import h5py
import numpy as np

REPLICAS_AT_ONCE = 100


def main(path, spectrum=None):
    with h5py.File(path, "r") as file:
        replicas = file["replicas"]  # [replica, column, outcome], read part by part
        outcomes = file["outcomes"].asstr()[:]
        expected = np.loadtxt(spectrum, ndmin=1) if spectrum else np.full(replicas.shape[1], 1000.0)
        parts = range(0, replicas.shape[0], REPLICAS_AT_ONCE)
        folded = np.concatenate([np.einsum("j,rjk->rk", expected, replicas[i : i + REPLICAS_AT_ONCE]) for i in parts])
    for name, mean, sd in zip(outcomes, folded.mean(axis=0), folded.std(axis=0, ddof=1)):
        print(f"{name}\t{mean:.6g}\t{sd:.6g}")


if __name__ == "__main__":
    main(*sys.argv[1:])
