"""Adapters: determined, and taken away from readings."""
