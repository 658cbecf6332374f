"""Whether a window can be opened: asked in a process of its own, as the answer may be a crash."""

import os
import subprocess
import sys

from front3d.output.rendering import exit_of_trial

_TRIAL = """
import ctypes
library = ctypes.CDLL("libX11.so.6")
library.XOpenDisplay.restype = ctypes.c_void_p
if not library.XOpenDisplay(None):
    raise OSError
"""


def why_no_window() -> str | None:
    """None when there is a display; else a sentence. A display that does not answer is forgotten,
    so that pictures are drawn without one.
    """
    if not sys.platform.startswith("linux"):
        return None
    name = os.environ.get("DISPLAY")
    if not name:
        return "there is no display (DISPLAY is not set)"
    try:
        if exit_of_trial(_TRIAL, timeout=30.0) == 0:
            # A wish for drawing without a screen, left by whoever called, would leave none here.
            os.environ.pop("VTK_DEFAULT_OPENGL_WINDOW", None)
            return None
    except (OSError, subprocess.TimeoutExpired):
        pass
    del os.environ["DISPLAY"]
    return f"the display {name} does not answer"
