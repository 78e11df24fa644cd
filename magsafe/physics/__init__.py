"""Published formulas on SI floats and arrays. No pint, no file, no screen.

Conventions
-----------
- Phasors turn as exp(+j omega t); amplitudes are RMS unless a name says peak.
- z points up, the ground is the plane z = 0; angles are radians.
- Arrays are ordered (frequency, point, component); functions broadcast over their array arguments.
- Resistances of a loop are referred to the current at its capacitor port.
- Each function is one formula of one method. It holds in the range its docstring and its `Range` state, and
  the caller asks before it calls: nothing is stretched, clipped or repaired.
"""
