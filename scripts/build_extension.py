"""Builds the host's extension: the add-on, the solver and the libraries it needs, one zip a platform, in build/.

    python3 scripts/build_extension.py [PLATFORM...]      linux-x64 macos-arm64 macos-x64 windows-x64; default: all

Wheels come from the package index, for both Pythons the host has had (3.11 and 3.13), and stay in build/wheels. Never numpy:
the host brings its own, and a second one would break other add-ons. Needs .venv, which it makes where it is missing.
"""

import os
import shutil
import subprocess
import sys
import zipfile
from pathlib import Path

import setup

BUILD = setup.ROOT / "build"
PYTHONS = ("3.11", "3.13")
PLATFORMS = {  # the host's name of a platform: the wheels that run there, newest first
    "linux-x64": ("manylinux_2_28_x86_64", "manylinux_2_17_x86_64", "manylinux2014_x86_64"),
    "macos-arm64": ("macosx_14_0_arm64", "macosx_12_0_arm64", "macosx_11_0_arm64"),
    "macos-x64": ("macosx_14_0_x86_64", "macosx_10_13_x86_64", "macosx_10_9_x86_64"),
    "windows-x64": ("win_amd64",),
}
BINARY = {  # library: its licence, all of which go with GPL-3.0-or-later
    "scipy": "BSD-3-Clause; with OpenBLAS, BSD-3-Clause, and the GCC run-time library, GPL-3.0 with its exception",
    "shapely": "BSD-3-Clause; with GEOS, LGPL-2.1",
}
PURE = {"fpdf2": "LGPL-3.0-only", "fonttools": "MIT", "defusedxml": "PSF-2.0", "threadpoolctl": "BSD-3-Clause"}


def pinned(name):
    """`name==version` as .venv has it, so that what is built is what was tested."""
    pins = setup.HOST_PINS[3, 13] + setup.PINS
    return next(pin for pin in pins if pin.startswith(f"{name}=="))


def pip(*words):
    """Run pip quietly; its own messages explain a failure, which ends the build."""
    done = subprocess.run([sys.executable, "-m", "pip", "--disable-pip-version-check", *words],
                          stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True)
    if done.returncode:
        sys.exit(f"pip {words[0]} failed:\n{done.stdout}")


def fetch(name, folder, *where):
    """Path of the wheel of `name` in `folder`, downloaded unless it is there."""
    pin = pinned(name)
    folder.mkdir(parents=True, exist_ok=True)
    version = pin.split("==")[1]
    if not (found := sorted(folder.glob(f"{name}-{version}-*.whl"))):
        pip("download", "--quiet", "--no-deps", "--only-binary", ":all:", "--dest", str(folder), *where, pin)
        found = sorted(folder.glob(f"{name}-{version}-*.whl"))
    return found[-1]


def solver_wheel():
    """The solver's own wheel, built from a copy so that nothing is left in the source."""
    source, folder = BUILD / "solver", BUILD / "wheels" / "own"
    shutil.rmtree(source, ignore_errors=True)
    shutil.rmtree(folder, ignore_errors=True)
    shutil.copytree(setup.ROOT / "solver", source, ignore=shutil.ignore_patterns("__pycache__", "*.egg-info", "build"))
    shutil.copy(setup.ROOT / "LICENSE", source)
    pip("wheel", "--quiet", "--no-deps", "--wheel-dir", str(folder), str(source))
    return next(folder.glob("*.whl"))


def wheels(platform):
    """Every wheel that the extension needs on `platform`."""
    found = [solver_wheel()]
    found += [fetch(name, BUILD / "wheels" / "pure", "--platform", "any", "--implementation", "py", "--abi", "none",
                    "--python-version", PYTHONS[0]) for name in PURE]
    for python in PYTHONS:
        where = ["--python-version", python, "--implementation", "cp"]
        for tag in PLATFORMS[platform]:
            where += ["--platform", tag]
        found += [fetch(name, BUILD / "wheels" / platform / python, *where) for name in BINARY]
    return found


def stage(platform):
    """Folder with the add-on, its wheels and a manifest that names them, as the host's builder wants it."""
    folder = BUILD / "stage" / platform
    shutil.rmtree(folder, ignore_errors=True)
    shutil.copytree(setup.ROOT / "addon", folder, ignore=shutil.ignore_patterns("__pycache__"))
    shutil.copy(setup.ROOT / "LICENSE", folder)
    lines = [f"{pinned(name)}: {licence}\n" for name, licence in sorted((BINARY | PURE).items())]
    (folder / "LICENCES.txt").write_text(
        "Seamwright: GPL-3.0-or-later, see LICENSE. It brings these libraries, whose licences lie in their wheels:\n\n"
        + "".join(lines), encoding="utf-8")
    (folder / "wheels").mkdir()
    lines = []
    for wheel in wheels(platform):
        shutil.copy(wheel, folder / "wheels")
        lines.append(f'  "./wheels/{wheel.name}",\n')
    manifest = folder / "blender_manifest.toml"
    head, mark, tail = manifest.read_text(encoding="utf-8").partition("[permissions]")
    manifest.write_text(f'{head}platforms = ["{platform}"]\nwheels = [\n{"".join(lines)}]\n\n{mark}{tail}', encoding="utf-8")
    return folder


def host_builder():
    """The host's own extension builder and validator, which come with its Python module."""
    import bpy

    return Path(bpy.__file__).parents[2] / "addons_core/bl_pkg/cli/blender_ext.py"  # .../scripts/modules/bpy/__init__.py


def build(platform):
    """Path of the zip for `platform`, built and validated by the host's own tool."""
    builder = [sys.executable, str(host_builder())]
    made = BUILD / f"seamwright-{platform}.zip"
    for words in (["build", f"--source-dir={stage(platform)}", f"--output-filepath={made}"], ["validate", str(made)]):
        done = subprocess.run([*builder, *words], stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True)
        if done.returncode:
            sys.exit(f"{platform}: the host's tool refused to {words[0]}:\n{done.stdout}")
    return made


def main(platforms):
    """Build for `platforms`, or for all of them, and say how large each zip is."""
    unknown = set(platforms) - set(PLATFORMS)
    if unknown:
        sys.exit(f"unknown platform {', '.join(sorted(unknown))}; known: {', '.join(PLATFORMS)}")
    for platform in platforms or PLATFORMS:
        made = build(platform)
        with zipfile.ZipFile(made) as archive:
            inside = sum(info.file_size for info in archive.infolist())
        print(f"{made.relative_to(setup.ROOT)}: {os.path.getsize(made) / 1e6:.1f} MB, {inside / 1e6:.1f} MB unpacked")


if __name__ == "__main__":
    setup.enter(__file__)
    main(sys.argv[1:])
