"""Trust: what survives another seed, a few false edges, another resolution, and chance."""
