"""Remake the sample campaigns: the same integers and the same text files, from fixed seeds.

    python sample_runs/remake.py [FOLDER]

FOLDER is this folder unless said.  Sheets and notes are written by hand and copied; run lists and
captures are made.
"""

import shutil
import sys
from pathlib import Path

import make_bench
import make_kinds
import make_rings

HERE = Path(__file__).resolve().parent


def campaign_folder(into: Path, name: str) -> Path:
    """The campaign's folder in `into`, with its sheet and its note."""
    folder = into / name
    if folder != HERE / name:
        folder.mkdir(parents=True, exist_ok=True)
        for written in ("campaign.toml", "NOTE.md"):
            shutil.copy(HERE / name / written, folder / written)
    return folder


def main(into: Path) -> None:
    """All campaigns into `into`."""
    for name, maker in (("rings_autumn", make_rings), ("one_ring_bench", make_bench), ("ring_kinds", make_kinds)):
        folder = campaign_folder(into, name)
        maker.write_runs(folder)
        maker.write_captures(folder)
        print(f"{name}: made in {folder}")


if __name__ == "__main__":
    main(Path(sys.argv[1]).resolve() if len(sys.argv) > 1 else HERE)
