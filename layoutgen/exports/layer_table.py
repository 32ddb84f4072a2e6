"""The table of layers that travels with a GDS file, which carries numbers and no names."""

from __future__ import annotations

import csv
from pathlib import Path

from layoutgen.geometry import Artwork, Layer

__all__ = ["write"]

HEADER = ("layer", "gds_layer", "gds_datatype", "dxf_layer", "holds", "objects", "purpose")


def write(artwork: Artwork, path: Path) -> None:
    """Write one line for each layer as CSV, empty layers included.

    Parameters
    ----------
    artwork : Artwork
        Its objects are counted.
    path : Path
        File to be made or replaced.
    """
    with path.open("w", encoding="utf-8", newline="") as file:
        table = csv.writer(file, lineterminator="\n")
        table.writerow(HEADER)
        for layer in Layer:
            table.writerow((layer.name, layer.gds_layer, layer.gds_datatype, layer.dxf_name, layer.holds,
                            len(artwork.on_layer(layer)), layer.purpose))
