"""Lodestead's desktop: the screen over the engine."""
