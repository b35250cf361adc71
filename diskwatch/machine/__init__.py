"""The only readers of this computer: its drives, its kernel's counters, its mounts."""
