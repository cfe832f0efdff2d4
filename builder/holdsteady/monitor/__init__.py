"""From readings to points, limits in force, signals, cases and a state: one characteristic in, one finding out."""
