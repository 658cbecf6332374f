"""front3d: stress intensity factors along three-dimensional crack fronts."""

__version__ = "0.1.0"
