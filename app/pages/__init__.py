"""Pages that stand in the drawing's place or at its foot and say why."""
