"""Folds a spectrum with every replica of OGIP response files and prints mean and sd of each channel.

    entasis convert BUNDLE --to fits --out gallery.rsp
    python fold_fits.py gallery-replicas.rsp [SPECTRUM]

SPECTRUM is a text file with one number a line: the expected events of each energy row (the bins of the true axis;
what lies outside them has no row in such a file). Without it, 1000 each. Needs astropy and numpy. The sd is the
uncertainty that the calibration's statistics leave in the folded spectrum: systematic effects are yours to add.
"""

import sys

import numpy as np
from astropy.io import fits


def unpack(table):
    """The matrix [row, channel] of a MATRIX or SPECRESP MATRIX extension: runs of channels, counted from TLMIN."""
    header, data = table.header, table.data
    first = header[f"TLMIN{data.columns.names.index('F_CHAN') + 1}"]
    matrix = np.zeros((len(data), header["DETCHANS"]))
    for row, starts, lengths, elements in zip(matrix, data["F_CHAN"], data["N_CHAN"], data["MATRIX"]):
        at = 0
        for start, length in zip(np.atleast_1d(starts) - first, np.atleast_1d(lengths)):
            row[start : start + length] = elements[at : at + length]
            at += length
    return matrix


def main(path, spectrum=None):
    with fits.open(path) as hdus:
        bounds = hdus["EBOUNDS"].data
        folded = []
        for hdu in hdus:
            if hdu.name not in ("MATRIX", "SPECRESP MATRIX"):
                continue
            matrix = unpack(hdu)
            expected = np.loadtxt(spectrum, ndmin=1) if spectrum else np.full(len(matrix), 1000.0)
            folded.append(expected @ matrix)
        folded = np.array(folded)
        rows = zip(bounds["E_MIN"], bounds["E_MAX"], folded.mean(axis=0), folded.std(axis=0, ddof=1))
        for low, high, mean, sd in rows:
            print(f"[{low:.6g}, {high:.6g}) keV\t{mean:.6g}\t{sd:.6g}")


if __name__ == "__main__":
    main(*sys.argv[1:])
