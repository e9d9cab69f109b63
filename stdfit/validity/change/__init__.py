"""Has a standard changed: wear, history, repeatability."""
