"""`front3d view`: the folder of an earlier evaluation in a window, or as a picture without one."""

import argparse
from pathlib import Path

from front3d.cli.command import Command


def add_flags(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "folder", metavar="OUT", type=Path, help="folder that an evaluation was written to"
    )


def run(arguments: argparse.Namespace) -> int:
    from front3d.output.rendering import why_no_pictures
    from front3d.output.saved import read_saved
    from front3d.output.window.display import why_no_window
    from front3d.results import CAUTION

    saved = read_saved(arguments.folder)
    if not saved.evaluation.fronts:
        print(f"{arguments.folder}: there is no front to show")
        return 0
    no_window, no_pictures = why_no_window(), why_no_pictures()
    if no_pictures is not None:
        from front3d.output.window.panel import save_panel

        print(f"note: {no_pictures}\nwritten: {save_panel(saved)}\n{CAUTION}")
        return 0
    from front3d.output.window.screen import Window, picture_without_window

    if no_window is not None:
        path = picture_without_window(saved)
        print(f"note: {no_window}; what the window would show is in the picture")
        print(f"written: {path}\n{CAUTION}")
        return 0
    print("a window opens; its buttons and keys are named in it. Close it with q.")
    window = Window(saved)
    window.show()
    print("\n".join([*(f"written: {path}" for path in dict.fromkeys(window.written)), CAUTION]))
    return 0


COMMAND = Command(
    "view",
    "show scene and chart of an earlier evaluation in a window; as a picture without a display",
    add_flags,
    run,
)
