"""Checks of what physics and good practice expect of a model, said with numbers."""
