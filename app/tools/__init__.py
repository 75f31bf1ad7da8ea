"""Tools: what press, move and release on the drawing mean, without any drawing."""
