"""Telling people: when to speak, what to say, and the ways to a person's desktop or to a program of theirs."""
