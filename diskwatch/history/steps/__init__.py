"""The steps of the schema, one a file; none is ever changed once a history may have taken it."""
