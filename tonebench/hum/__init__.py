"""Mains hum: find, track, treat and verify. The spectral peak search of the first slice lives here."""
