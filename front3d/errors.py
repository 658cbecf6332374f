"""The errors front3d raises: one family, so that a caller can catch all of them at once.

A message says what was found, what was expected, which entity it concerns, and what to do.
"""


class Front3DError(Exception):
    """Base of every error that front3d raises on purpose."""


class ReadError(Front3DError):
    """A file cannot be read, or lacks something that every result must hold."""


class MeshError(Front3DError):
    """The cells or points of a solid are not usable."""


class CrackError(Front3DError):
    """No crack, no front, or a front that is not a simple curve."""


class MethodError(Front3DError):
    """A method cannot be applied to this front."""


class CaseError(Front3DError):
    """A case file, an option or a parameter is wrong."""
