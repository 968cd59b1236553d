"""Makes the event files of this folder, which the readers of src/events are tested against.

Made on Debian 12 with python3 3.11, numpy 1.24.2, h5py 3.7.0 and zstd 1.5.4:  python3 make.py
Every file holds the table of `rows`: row i is t = i % 50 + 0.25, r = i * 7 % 101.
"""

import subprocess
from pathlib import Path

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


make_zstd()
