"""Covers: clique percolation for every k, agreement of covers, and from a partition to a cover."""
