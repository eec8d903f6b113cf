"""The pictures of the demo, each drawn by a process of its own; `draw` starts them, two at a time.

    python -m harbour.pictures OUT FOLDER SIDE      a covered form, "front" or "back"
    python -m harbour.pictures OUT quay before      the whole quay as it is modelled
    python -m harbour.pictures OUT quay after FOLDER...    the same, with the forms of these folders covered
"""

import os
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

VIEWS = {"front": (0.6, -1.0, 0.6), "back": (-0.6, 1.0, -0.4)}  # whence the camera looks at a form that lies along x
SIZE = (520, 420)
QUAY = "quay"
SCENE_FILE = "harbour.blend"
HERE = Path(__file__).parent.parent


def draw(out, folders, workers=2):
    """Draw the quay before and after, and each covered form (the names of their folders in `out`) from both sides.

    Raises RuntimeError with the last lines of a picture that failed.
    """
    wanted = [(QUAY, "before"), (QUAY, "after", *folders), *((folder, side) for folder in folders for side in VIEWS)]
    with ThreadPoolExecutor(workers) as pool:
        for words, done in zip(wanted, pool.map(lambda words: _start(out, words), wanted), strict=True):
            if done.returncode:
                lines = "\n".join(done.stdout.splitlines()[-8:])
                raise RuntimeError(f"The picture {' '.join(words[:2])} could not be drawn:\n{lines}")


def _start(out, words):
    command = [sys.executable, "-m", "harbour.pictures", str(out.absolute()), *words]
    return subprocess.run(command, cwd=HERE, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True)


def draw_form(out, folder, side):
    """One covered form on an empty ground."""
    import bpy
    import numpy as np

    from . import covered, studio

    bpy.ops.wm.read_factory_settings(use_empty=True)
    scene = bpy.context.scene
    document = covered.read(out / folder / "pattern.json")
    studio.light(scene)
    studio.resolution(scene, SIZE)
    points = covered.build(scene, document)
    studio.camera(scene, turned(VIEWS[side], points))
    studio.frame(scene, points)
    covered.label(scene, document, 0.045 * np.linalg.norm(np.ptp(points, axis=0)))
    studio.render(scene, out / folder / f"{side}.png")


def turned(direction, points):
    """`direction` turned about the vertical with the way in which the points (n, 3) lie longest."""
    import numpy as np

    x, y = np.linalg.eigh(np.cov(points[:, :2].T))[1][:, 1]
    if x < 0:
        x, y = -x, -y
    return direction[0] * x - direction[1] * y, direction[0] * y + direction[1] * x, direction[2]


def draw_quay(out, side, folders):
    """The whole scene; the forms whose sheets lie in `folders` wear them."""
    import bpy

    from . import covered, studio

    bpy.ops.wm.open_mainfile(filepath=str(out / SCENE_FILE), load_ui=False)
    scene = bpy.data.scenes["Quay"]
    bpy.context.window.scene = scene
    for folder in folders:
        document = covered.read(out / folder / "pattern.json")
        covered.build(scene, document)
        bpy.data.objects[document["summary"]["form"]].hide_render = True
    studio.render(scene, out / f"{QUAY}-{side}.png")


if __name__ == "__main__":
    place, (what, how, *rest) = Path(sys.argv[1]), sys.argv[2:]
    if what == QUAY:
        draw_quay(place, how, rest)
    else:
        draw_form(place, what, how)
    sys.stdout.flush()
    os._exit(0)  # the renderer's threads can keep an ordinary exit waiting for ever
