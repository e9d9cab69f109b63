"""Raw readings: with references, and without."""
