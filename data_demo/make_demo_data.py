"""Make the demo recordings, their case files and the truth behind them. Everything is invented.

    python data_demo/make_demo_data.py            # writes beside this file
    python data_demo/make_demo_data.py FOLDER     # writes elsewhere

Seeds are fixed: the same files come out again, byte for byte.
"""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent))

from invent_artery import cohort, forearm, gated
from invent_pump import supply, wash_down
from invent_rig import bench, two_stations


def make_all(folder: Path) -> None:
    """Write every demo below a folder."""
    for make in (forearm, gated, cohort, bench, two_stations, wash_down, supply):
        make(folder)


if __name__ == "__main__":
    make_all(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent)
