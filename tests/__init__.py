"""Tests of the package; a regular package, so that no other one of this name on the path is taken for it."""
