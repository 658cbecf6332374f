"""Tests of front3d: a package, so that test files can share `reference` and `meshes`."""
