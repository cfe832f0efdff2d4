"""From readings to points, limits in force, signals, cases and a state.

One characteristic in, one finding out.
"""
