"""The four sample rooms, each as a function that returns its layout."""
