"""An invented machine whose drives live through years in seconds, some of them failing.

It stands behind the same protocol as the real one (`diskwatch.machine.protocol`), so that rounds, analyser and
history run unchanged. Makers, models, serials, people and places are invented and say so.
"""
