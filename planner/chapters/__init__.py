"""One file per topic: its givens, its results and its limits. No chapter imports another."""
