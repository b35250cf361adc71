"""Pictures made of letters: one signal through time, and a drive as a line through time. Pure."""
