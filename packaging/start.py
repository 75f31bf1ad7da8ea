#!/usr/bin/env python3
"""Sets Lodestead up on a fresh machine and starts it; standard library only.

    python3 packaging/start.py              open the desktop on a sample
    python3 packaging/start.py test         run all tests
    python3 packaging/start.py -- ARGS      run a command without a screen

Written in plain old syntax, so that an old Python reaches the sentence that says so.
"""

import ctypes.util
import hashlib
import os
import shutil
import subprocess
import sys

ROOT = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))
ENVIRONMENT = os.path.join(ROOT, ".venv")
CONSTRAINTS = os.path.join(ROOT, "packaging", "constraints.txt")
SAMPLE = os.path.join(ROOT, "sample_layouts", "small-switch-room.json")
DESKTOP_SAMPLE = os.path.join(ROOT, "sample_layouts", "office-over-switch-room.json")
OLDEST = (3, 11)

# Tests of one file share what they compute. Windows of many processes fill the memory.
SIDE_BY_SIDE = ["-n", str(min(os.cpu_count() or 1, 4)), "--dist", "loadfile"]

# What Qt loads on Linux, as (library, Debian packages of which one exists).
QT_LIBRARIES = [
    ("GL", ["libgl1"]),
    ("EGL", ["libegl1"]),
    ("xkbcommon", ["libxkbcommon0"]),
    ("glib-2.0", ["libglib2.0-0t64", "libglib2.0-0"]),
    ("fontconfig", ["libfontconfig1"]),
    ("dbus-1", ["libdbus-1-3"]),
    ("xkbcommon-x11", ["libxkbcommon-x11-0"]),
    ("xcb-cursor", ["libxcb-cursor0"]),
    ("xcb-icccm", ["libxcb-icccm4"]),
    ("xcb-keysyms", ["libxcb-keysyms1"]),
    ("xcb-shape", ["libxcb-shape0"]),
    ("xcb-xkb", ["libxcb-xkb1"]),
]


class Stopped(Exception):
    """Setting up cannot go on; the message is a sentence for the user."""


def check_python(version):
    """Refuse a Python that is too old, by its version tuple."""
    if tuple(version[:2]) < OLDEST:
        raise Stopped(
            "Lodestead needs Python %d.%d or newer, and this is Python %d.%d. "
            "Install a newer Python and run the same command with it."
            % (OLDEST[0], OLDEST[1], version[0], version[1])
        )


def environment_python():
    """The Python inside .venv."""
    if os.name == "nt":
        return os.path.join(ENVIRONMENT, "Scripts", "python.exe")
    return os.path.join(ENVIRONMENT, "bin", "python")


def wanted_state():
    """Digest of everything that decides what is installed."""
    digest = hashlib.sha256(sys.version.encode())
    for name in ("pyproject.toml", os.path.join("packaging", "constraints.txt")):
        with open(os.path.join(ROOT, name), "rb") as file:
            digest.update(file.read())
    return digest.hexdigest()


def make_environment():
    """Make .venv and install the pinned dependencies, unless that is done."""
    stamp = os.path.join(ENVIRONMENT, "lodestead-installed")
    state = wanted_state()
    if os.path.exists(stamp):
        with open(stamp) as file:
            if file.read() == state:
                return
    print("Setting up .venv (once; some minutes, about 1 GB) ...", flush=True)
    if not os.path.exists(environment_python()):
        make_venv()
    install = [
        environment_python(), "-m", "pip", "install", "--quiet",
        "--disable-pip-version-check", "-c", CONSTRAINTS, "-e", ROOT + "[test]",
    ]  # fmt: skip
    if subprocess.call(install) != 0:
        raise Stopped(
            "The packages that Lodestead needs could not be installed; pip's own "
            "message stands above. Most often there is no network, or a proxy is "
            "not set. Nothing else was changed; run the same command again."
        )
    with open(stamp, "w") as file:
        file.write(state)


def make_venv():
    """Make .venv, with a sentence where Python came without the venv module."""
    command = [sys.executable, "-m", "venv", ENVIRONMENT]
    if subprocess.call(command) == 0:
        return
    if is_debian() and is_root():
        package = "python%d.%d-venv" % sys.version_info[:2]
        install_packages([package])
        shutil.rmtree(ENVIRONMENT, ignore_errors=True)
        if subprocess.call(command) == 0:
            return
    shutil.rmtree(ENVIRONMENT, ignore_errors=True)
    raise Stopped(
        "This Python could not make a virtual environment in .venv. On Debian and "
        "Ubuntu install its module with: sudo apt-get install python3-venv. "
        "Elsewhere check that the project's folder can be written to."
    )


def is_debian():
    """Whether packages come from apt-get."""
    return sys.platform.startswith("linux") and shutil.which("apt-get") is not None


def is_root():
    """Whether this user may install system packages."""
    return hasattr(os, "geteuid") and os.geteuid() == 0


def install_packages(packages):
    """Install Debian packages as root; False when that failed."""
    environment = dict(os.environ, DEBIAN_FRONTEND="noninteractive")
    quiet = {"env": environment, "stdout": subprocess.DEVNULL}
    subprocess.call(["apt-get", "update", "-qq"], **quiet)
    return (
        subprocess.call(
            ["apt-get", "install", "-y", "-qq", "--no-install-recommends"] + packages,
            **quiet,
        )
        == 0
    )


def known_package(names):
    """The first of `names` that this Debian or Ubuntu offers, else the last."""
    for name in names[:-1]:
        command = ["apt-cache", "show", name]
        if (
            subprocess.call(
                command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
            )
            == 0
        ):
            return name
    return names[-1]


def missing_libraries():
    """The entries of QT_LIBRARIES that the loader does not find."""
    if not sys.platform.startswith("linux"):
        return []
    return [entry for entry in QT_LIBRARIES if not ctypes.util.find_library(entry[0])]


def provide_libraries():
    """Install what Qt needs, or say what is missing and go on."""
    missing = missing_libraries()
    if not missing:
        return
    if not is_debian():
        names = ", ".join(library for library, _ in missing)
        print("The window may need these system libraries, not found here: " + names)
        return
    if is_root():
        print("Installing the system libraries that Qt needs ...", flush=True)
        subprocess.call(["apt-get", "update", "-qq"], stdout=subprocess.DEVNULL)
    packages = [known_package(packages) for _, packages in missing]
    if not is_root() or not install_packages(packages):
        print(
            "The window needs system libraries that are missing here. Install them "
            "with: sudo apt-get install " + " ".join(packages)
        )


def has_screen():
    """Whether a window can be shown."""
    if not sys.platform.startswith("linux"):
        return True
    return bool(os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY"))


def run(*arguments):
    """Run the environment's Python in this folder; its exit code."""
    return subprocess.call([environment_python()] + list(arguments))


def first_look():
    """Assess the sample and write its report and map, saying where."""
    folder = os.path.join(ROOT, "results")
    os.makedirs(folder, exist_ok=True)
    report = os.path.join(folder, "small-switch-room.pdf")
    picture = os.path.join(folder, "small-switch-room.png")
    print("No window is opened here; assessing the sample " + SAMPLE, flush=True)
    # Exit codes 1 and 3 are findings about the room, not failures of the program.
    if run("-m", "engine", "assess", SAMPLE) == 2:
        return 2
    for command in (
        ["report", SAMPLE, report],
        ["map", SAMPLE, "--height", "1.0", picture],
    ):
        code = run("-m", "engine", *command)
        if code != 0:
            return code
    print("Report: " + report)
    print("Map:    " + picture)
    return 0


def main(arguments):
    """Set up, then do what was asked; the exit code."""
    try:
        check_python(sys.version_info)
        if arguments and arguments[0] not in ("test", "--"):
            raise Stopped(
                "%r is not understood. Use no argument for the desktop, 'test' for "
                "the tests, or '--' and a command without a screen." % arguments[0]
            )
        make_environment()
        if arguments[:1] == ["--"]:
            return run("-m", "engine", *arguments[1:])
        provide_libraries()
        if arguments[:1] == ["test"]:
            os.chdir(ROOT)
            return run("-m", "pytest", *(SIDE_BY_SIDE + arguments[1:]))
        if has_screen():
            return run("-m", "app", DESKTOP_SAMPLE)
        return first_look()
    except Stopped as stopped:
        print(str(stopped), file=sys.stderr)
        return 2
    except KeyboardInterrupt:
        return 130


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
