"""The full-screen terminal dashboard; it reads the history and nothing else."""
