"""Beams, trusses and the spreading of loads: numpy in, numpy out, coherent SI."""
