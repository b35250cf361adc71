"""The ticket: what a help desk or a warranty desk needs to act on a drive without asking back."""
