"""Whether pictures can be drawn here: tried once, in a process of its own.

Without a GL library the drawing library ends the whole process with a segmentation fault, so no
`except` can catch it. A small picture in a child process shows it beforehand.
"""

import os
import subprocess
import sys
from functools import cache

DEBIAN_PACKAGES = "libegl1 libgl1-mesa-dri libx11-6"

_TRIAL = """
import pyvista
plotter = pyvista.Plotter(off_screen=True, window_size=(32, 32))
plotter.add_mesh(pyvista.Sphere(theta_resolution=6, phi_resolution=6))
plotter.screenshot(None, return_img=True)
"""


@cache
def why_no_pictures(timeout: float = 120.0) -> str | None:
    """None when pictures can be drawn; else a sentence with the reason and what to do."""
    choose_window()
    try:
        ended = exit_of_trial(_TRIAL, timeout)
    except (OSError, subprocess.TimeoutExpired) as error:
        return _advice(f"a trial picture failed: {type(error).__name__}")
    if ended == 0:
        return None
    how = "crashed" if ended < 0 else "failed"
    return _advice(f"a trial picture {how}, as it does without a graphics library")


def exit_of_trial(script: str, timeout: float) -> int:
    """How a script ends in a Python process of its own: 0 well, negative by a signal.

    Raises OSError or subprocess.TimeoutExpired where it cannot be told.
    """
    trial = subprocess.run(
        [sys.executable, "-c", script],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        timeout=timeout,
        check=False,
    )
    return trial.returncode


def choose_window() -> None:
    """Ask for drawing without a screen where there is none, before the library loads."""
    if sys.platform.startswith("linux") and not os.environ.get("DISPLAY"):
        os.environ.setdefault("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")


def _advice(reason: str) -> str:
    return (
        f"the picture of the solid was left out ({reason}). On Debian this suffices: "
        f"apt-get install {DEBIAN_PACKAGES}. Tables and charts are complete"
    )
