"""Folds a spectrum with every replica of an Entasis bundle and prints mean and sd of each outcome.

    python fold_npy.py BUNDLE [SPECTRUM]

BUNDLE is the folder that `entasis build` wrote. SPECTRUM is a text file with one number a line: the expected events
of each column in the order of manifest.json (for a numeric axis: below, the bins, above). Without it, 1000 each.
Needs numpy. The sd is the uncertainty that the calibration's statistics leave in the folded spectrum: systematic
effects are yours to add.
"""

import json
import sys
from pathlib import Path

import numpy as np


def main(folder, spectrum=None):
    folder = Path(folder)
    manifest = json.loads((folder / "manifest.json").read_text(encoding="utf-8"))
    # [replica, column, outcome]; mapped, so that an ensemble larger than memory can be opened.
    replicas = np.load(folder / "replicas.npy", mmap_mode="r", allow_pickle=False)
    expected = np.loadtxt(spectrum, ndmin=1) if spectrum else np.full(replicas.shape[1], 1000.0)
    folded = np.array([expected @ replica for replica in replicas])
    for name, mean, sd in zip(manifest["outcomes"], folded.mean(axis=0), folded.std(axis=0, ddof=1)):
        print(f"{name}\t{mean:.6g}\t{sd:.6g}")


if __name__ == "__main__":
    main(*sys.argv[1:])
