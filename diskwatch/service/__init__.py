"""The watch: the schedule, the rounds, the life cycle."""
