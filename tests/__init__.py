"""Tests of front3d.  A package, so that test files can share `tests.reference` and `tests.meshes`."""
