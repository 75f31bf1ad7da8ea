"""Views: the layout as pictures that answer to the pointer."""
