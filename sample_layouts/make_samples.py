"""Write the four sample layouts: `python sample_layouts/make_samples.py [FOLDER]`.

The rooms are written down in `rooms/`, one module each, with the coordinates where
they belong; the files beside this program are what it writes. Run it again after a
change of a room or of the file format.
"""

from __future__ import annotations

import sys
from pathlib import Path

# So that the program runs from a source tree as it is, installed or not.
HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent)]

from rooms.battery_laboratory import battery_laboratory  # noqa: E402
from rooms.imaging_corridor import imaging_corridor  # noqa: E402
from rooms.office_over_switch_room import office_over_switch_room  # noqa: E402
from rooms.small_switch_room import small_switch_room  # noqa: E402

from engine.layout_file import write  # noqa: E402

SAMPLES = {
    "small-switch-room.json": small_switch_room,
    "office-over-switch-room.json": office_over_switch_room,
    "imaging-corridor.json": imaging_corridor,
    "battery-laboratory.json": battery_laboratory,
}


def main(folder: Path) -> None:
    """Write every sample into `folder`."""
    for name, layout in SAMPLES.items():
        write(folder / name, layout())


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
