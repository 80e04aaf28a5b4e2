"""Hingewise's computation: from bedding, cleavage, intersection and hinge readings to a verdict.

Conventions, everywhere in this package:

- Vectors are unit vectors in north, east, down; arrays of them have shape (..., 3).
- Azimuths are degrees clockwise from true north, 0 <= azimuth < 360; dips and plunges are 0 to 90 degrees
  down.
- Strike follows the right-hand rule: looking along strike the plane dips to the right.
- Lines and poles are axes: a vector and its opposite are the same thing.
- Transection is positive where cleavage strikes clockwise of the hinge, seen on a map.

Importing this package loads none of its rooms.
"""

__version__ = "0.1.0"
