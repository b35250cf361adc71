"""Pure mathematics of change: no clock, no input or output, state as plain values that survive a restart."""
