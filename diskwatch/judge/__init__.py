"""From findings to a deed: pure rules in explicit tables."""
