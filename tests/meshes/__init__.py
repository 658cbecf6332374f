"""Meshes for the tests: structured ones for imposed fields, unstructured ones for solved models."""
