"""The tests: a package of its own, so that no package of this name which a library installs is taken for it."""
