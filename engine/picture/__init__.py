"""Pictures of maps as marks on paper, for pixels and for vectors alike."""

from engine.picture.map_picture import map_picture
from engine.picture.marks import Picture, Raster, Stroke, Words
from engine.picture.of_result import map_subjects
from engine.picture.references import reference_lines
from engine.picture.subject import MapSubject, OffsetLines, ReferenceLine

__all__ = [
    "MapSubject",
    "OffsetLines",
    "Picture",
    "Raster",
    "ReferenceLine",
    "Stroke",
    "Words",
    "map_picture",
    "map_subjects",
    "reference_lines",
]
