"""Makes the event files of this folder, which the readers of src/events are tested against.

Made on Debian 12 with python3 3.11, numpy 1.24.2, h5py 3.7.0, zstd 1.5.4 and lz4 1.9.4:  python3 make.py
Text files hold the table of row i: t = i % 50 + 0.25, r = i * 7 % 101. Binary files say what they hold below.
"""

import os
import subprocess
from pathlib import Path

import h5py
import numpy as np

HERE = Path(__file__).parent


def table(rows):
    return "t,r\n" + "".join(f"{i % 50}.25,{i * 7 % 101}\n" for i in range(rows))


def zstd(text, *options):
    return subprocess.run(["zstd", "-q", "-c", *options], input=text.encode(), capture_output=True, check=True).stdout


def make_zstd():
    text = table(40_000)
    middle = len(text) // 2 + 3
    skippable = bytes([0x50, 0x2A, 0x4D, 0x18, 5, 0, 0, 0]) + b"notes"
    (HERE / "checked.csv.zst").write_bytes(zstd(text, "-19"))
    (HERE / "unchecked.csv.zst").write_bytes(zstd(text, "-3", "--no-check"))
    (HERE / "frames.csv.zst").write_bytes(skippable + zstd(text[:middle]) + zstd("") + zstd(text[middle:], "-1"))
    (HERE / "tiny.csv.zst").write_bytes(zstd("t,r\n1,2\n"))


def lz4(text, *options):
    return subprocess.run(["lz4", "-q", "-c", *options], input=text.encode(), capture_output=True, check=True).stdout


def make_lz4():
    """Frames of the same table: blocks that stand alone and such that refer back, of 64 KiB and 4 MiB, checked and not."""
    text = table(40_000)
    middle = len(text) // 2 + 3
    skippable = bytes([0x5F, 0x2A, 0x4D, 0x18, 5, 0, 0, 0]) + b"notes"
    (HERE / "checked.lz4").write_bytes(lz4(text, "-9", "-BX", "-B4"))
    (HERE / "linked.lz4").write_bytes(lz4(text, "-1", "-BD", "-B4"))
    (HERE / "unchecked.lz4").write_bytes(lz4(text, "--no-frame-crc", "-B7"))
    (HERE / "frames.lz4").write_bytes(skippable + lz4(text[:middle]) + lz4("") + lz4(text[middle:], "-12", "-BD"))
    # Digits as random as they come are stored as they are.
    (HERE / "stored.lz4").write_bytes(lz4(np.random.default_rng(1).bytes(70_000).decode("latin1"), "-1", "-B4"))


ROWS = 1000


def columns():
    """Row i of 1000, in every kind of number and text; the last column has its length and all its digits."""
    i = np.arange(ROWS)
    return {
        "e_tag": i / 4,
        "e_cluster": np.where(i % 10 == 3, np.nan, i / 8).astype("f4"),
        "big": (i / 16).astype(">f8"),
        "short": (i % 100 - 50).astype("i1"),
        "swapped": (i - 500).astype(">i4"),
        "event": np.int64(9007199254740992) + i,
        "unsigned": np.uint64(2**63) + i.astype("u8"),
        "quality": i % 3 == 0,
        "run": np.array([f"run {k % 4}" for k in i], dtype="S8"),
    }


def make_hdf5():
    data = columns()
    with h5py.File(HERE / "columns.h5", "w") as file:
        group = file.create_group("run1")
        for name, values in data.items():
            group.create_dataset(name, data=values, chunks=(300,), compression="gzip", shuffle=True)
        group.create_dataset("label", data=[f"\u00e9 {k % 5}" for k in range(ROWS)], dtype=h5py.string_dtype(), chunks=(256,))
        group.create_dataset("matrix", data=np.zeros((ROWS, 2)), compression="gzip")
        file.create_dataset("run2/e_tag", data=data["e_tag"][:10] * 2)
        file.create_dataset("scalar", data=1.5)
        file["alias"] = h5py.SoftLink("/run1/e_tag")
    record = np.empty(ROWS, dtype=[(name, values.dtype) for name, values in data.items()] + [("pair", "f8", 2)])
    for name, values in data.items():
        record[name] = values
    record["pair"] = 0
    with h5py.File(HERE / "table.h5", "w") as file:
        file.create_dataset("events/table", data=record, chunks=(128,), compression="gzip", fletcher32=True)
    with h5py.File(HERE / "plain.h5", "w") as file:
        file["t"] = data["e_tag"]
        file["r"] = data["e_tag"] / 2
    make_outward_links()


def make_outward_links():
    """Files that point at other files: their readers must not follow."""
    with h5py.File(HERE / "outward.h5", "w") as file:
        file["link"] = h5py.ExternalLink("plain.h5", "/t")
        file.create_dataset("raw", shape=(8,), dtype="f8", external=[("plain.h5", 0, 64)])
        layout = h5py.VirtualLayout(shape=(8,), dtype="f8")
        layout[:] = h5py.VirtualSource("plain.h5", "t", shape=(ROWS,))[:8]
        file.create_virtual_dataset("virtual", layout)
        file["t"] = np.arange(8.0)


def make_numpy():
    data = columns()
    data["half"] = (np.arange(ROWS) / 2).astype("f2")
    data["name"] = np.array([f"\u00e9 {k % 5}" for k in range(ROWS)], dtype=">U6")
    fields = [(name, values.dtype) for name, values in data.items()]
    record = np.zeros(ROWS, dtype=np.dtype(fields + [("pair", "f8", 2), ("z", "c16")], align=True))
    for name, values in data.items():
        record[name] = values
    np.save(HERE / "table.npy", record)
    with open(HERE / "version3.npy", "wb") as file:
        named = np.array([(1.5, 2)], dtype=[("\u03b5", "f8"), ("r", "i4")])
        np.lib.format.write_array(file, named, version=(3, 0))
    with open(HERE / "version2.npy", "wb") as file:
        np.lib.format.write_array(file, record[["e_tag", "run"]][:20].copy(), version=(2, 0))
    np.savez_compressed(HERE / "columns.npz", **data, matrix=np.zeros((3, 2)), short_one=np.arange(5.0))
    np.savez(HERE / "stored.npz", t=data["e_tag"][:20], events=record[["e_tag", "run"]][:20].copy())
    np.save(HERE / "plain.npy", data["e_tag"][:5])
    np.save(HERE / "objects.npy", np.array([{}, 1], dtype=object), allow_pickle=True)


os.chdir(HERE)
make_numpy()
make_zstd()
make_lz4()
make_hdf5()
