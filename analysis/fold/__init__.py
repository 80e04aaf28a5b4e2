"""The check itself: hinge, cleavage and intersection, signed transection, verdict and advice."""
