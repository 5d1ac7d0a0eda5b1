#!/usr/bin/env python3
"""Starts the real program under a virtual display, visits every station of every sample, and takes pictures.

    python3 tests/pictures/run.py                     build, look at everything, fail on a blank or cropped picture
    python3 tests/pictures/run.py --into FOLDER       keep the pictures there
    python3 tests/pictures/run.py --assets            put the best ones into assets/, for the README
    python3 tests/pictures/run.py --binary PATH       a program that is built already
    python3 tests/pictures/run.py --only NAME         one sample, in both themes and sizes

Every sample is seen in one theme and size; three of them in light and dark, at 1280x720 and 1920x1080. At the end the
program is killed in the middle of work and must offer its recovery copy.

Debian packages: xvfb libxcursor1 libxi6 libxkbcommon-x11-0 xdotool imagemagick x11-utils
"""

import argparse
import hashlib
import os
import pathlib
import shutil
import signal
import subprocess
import sys
import tempfile
import time

ROOT = pathlib.Path(__file__).resolve().parents[2]
STATIONS = ["behaviour", "merging", "codes", "equations", "proof", "handoff"]
SIZES = [(1280, 720), (1920, 1080)]
# Small, middle, and the largest: these are seen in all four combinations.
CLOSELY = ["sump_pump", "gate_drive", "lift_door"]
# The pictures of the README: sample, station, theme.
ASSETS = [
    ("sump_pump", "behaviour", "light"),
    ("gate_drive", "merging", "light"),
    ("gate_drive", "codes", "dark"),
    ("gate_drive", "equations", "light"),
    ("gate_drive", "proof", "dark"),
]
TOOLS = ["Xvfb", "xdotool", "import", "identify", "convert", "xwininfo"]
# A picture with fewer colours is taken to be blank: anti-aliased text alone makes more.
COLOURS = 60


class Fault(Exception):
    """Something on the screen is wrong."""


def run(*args, **more):
    done = subprocess.run(args, capture_output=True, text=True, check=False, **more)
    if done.returncode != 0:
        raise Fault(f"{' '.join(map(str, args))}: {done.stderr.strip() or done.returncode}")
    return done.stdout


class Display:
    """An X server without a screen."""

    def __init__(self):
        read, write = os.pipe()
        self.server = subprocess.Popen(
            ["Xvfb", "-displayfd", str(write), "-screen", "0", "1920x1080x24", "-nolisten", "tcp"],
            pass_fds=[write], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        os.close(write)
        with os.fdopen(read) as answer:
            number = answer.readline().strip()
        if not number:
            raise Fault("Xvfb does not start")
        os.environ["DISPLAY"] = f":{number}"

    def close(self):
        self.server.terminate()
        self.server.wait()


class Program:
    """The program on one file, with its own home."""

    def __init__(self, binary, file, home):
        environment = dict(os.environ, XDG_DATA_HOME=str(home), XDG_RUNTIME_DIR=str(home), LIBGL_ALWAYS_SOFTWARE="1")
        environment.pop("WAYLAND_DISPLAY", None)
        self.log = open(home / "log", "w+", encoding="utf-8")
        self.started = time.monotonic()
        self.process = subprocess.Popen([binary, str(file)], env=environment, stdout=self.log, stderr=self.log)
        self.window = self.wait_for_window()
        run("xdotool", "windowmove", self.window, "0", "0")
        run("xdotool", "windowfocus", self.window)

    def wait_for_window(self):
        for _ in range(300):
            if self.process.poll() is not None:
                self.log.seek(0)
                raise Fault(f"the program ended: {self.log.read()[-2000:]}")
            found = subprocess.run(["xdotool", "search", "--onlyvisible", "--name", "Stillgate$"],
                                   capture_output=True, text=True, check=False).stdout.split()
            if found:
                return found[-1]
            time.sleep(0.05)
        raise Fault("no window within 15 s")

    def key(self, *keys):
        run("xdotool", "key", "--clearmodifiers", *keys)

    def title(self):
        return run("xdotool", "getwindowname", self.window).strip()

    def resize(self, width, height):
        run("xdotool", "windowsize", "--sync", self.window, str(width), str(height))

    def shot(self, path, size):
        """A picture once nothing moves any more: two that are alike, one after the other."""
        before = None
        for _ in range(60):
            if self.process.poll() is not None:
                self.log.seek(0)
                raise Fault(f"the program ended: {self.log.read()[-2000:]}")
            # Of the screen, not of the window: a window that is too small shows by the black around it.
            run("import", "-window", "root", "-crop", f"{size[0]}x{size[1]}+0+0", "+repage", str(path))
            now = hashlib.sha256(run("convert", str(path), "-depth", "8", "-format", "%#", "info:").encode()).digest()
            if now == before:
                return now
            before = now
            time.sleep(0.12)
        raise Fault(f"{path.name}: the screen does not come to rest")

    def end(self, how=signal.SIGTERM):
        self.process.send_signal(how)
        self.process.wait()
        self.log.close()


def judge(path, size, theme):
    """Raises a fault if the picture is blank, cropped, too small, or in the other theme."""
    width, height, colours, mean = run("identify", "-format", "%w %h %k %[fx:mean]", str(path)).split()
    if (int(width), int(height)) != size:
        raise Fault(f"{path.name}: {width}x{height} in place of {size[0]}x{size[1]}")
    if int(colours) < COLOURS:
        raise Fault(f"{path.name}: blank, only {colours} colours")
    if (float(mean) > 0.5) != (theme == "light"):
        raise Fault(f"{path.name}: not in the {theme} theme")
    # The program paints no pure black: where it is seen at an edge, the window ends before the picture does.
    for name, crop in {"right": f"2x{size[1]}+{size[0] - 2}+0", "bottom": f"{size[0]}x2+0+{size[1] - 2}"}.items():
        black = float(run("convert", str(path), "-crop", crop, "+repage", "-fill", "white", "+opaque", "#000000",
                          "-fill", "white", "-negate", "-format", "%[fx:mean]", "info:"))
        if black > 0.02:
            raise Fault(f"{path.name}: cropped at the {name} edge")
    # Each quarter of the picture has something in it.
    half = (size[0] // 2, size[1] // 2)
    for x in (0, half[0]):
        for y in (0, half[1]):
            seen = int(run("convert", str(path), "-crop", f"{half[0]}x{half[1]}+{x}+{y}", "+repage",
                           "-format", "%k", "info:"))
            if seen < 8:
                raise Fault(f"{path.name}: nothing in the quarter at {x},{y}")


def visit(binary, sample, looks, folder, faults):
    """All stations of one sample in each of the looks: (theme, size)."""
    with tempfile.TemporaryDirectory() as home:
        program = Program(binary, ROOT / "projects" / f"{sample}.ron", pathlib.Path(home))
        first = time.monotonic() - program.started
        theme = None
        try:
            for wanted, size in looks:
                program.resize(*size)
                seen = {}
                for number, station in enumerate(STATIONS, 1):
                    program.key(f"ctrl+{number}")
                    path = folder / f"{sample}-{station}-{wanted}-{size[0]}.png"
                    picture = program.shot(path, size)
                    if theme is None:
                        theme = "light" if float(run("identify", "-format", "%[fx:mean]", str(path))) > 0.5 else "dark"
                    if theme != wanted:
                        program.key("F10")
                        theme = wanted
                        picture = program.shot(path, size)
                    if picture in seen:
                        faults.append(f"{path.name}: the same picture as {seen[picture]}")
                    seen[picture] = station
                    try:
                        judge(path, size, wanted)
                    except Fault as fault:
                        faults.append(str(fault))
        finally:
            program.end()
    return first


def crash(binary, folder):
    """Kills the program two seconds after an edit; the next start must offer the work."""
    with tempfile.TemporaryDirectory() as home:
        home = pathlib.Path(home)
        file = home / "pump.ron"
        shutil.copy(ROOT / "projects" / "sump_pump.ron", file)
        program = Program(binary, file, home)
        program.resize(*SIZES[0])
        program.shot(folder / "crash-before.png", SIZES[0])
        program.key("ctrl+1")
        program.key("ctrl+i")
        for _ in range(50):
            if program.title().startswith("*"):
                break
            time.sleep(0.05)
        else:
            raise Fault("Ctrl+I makes no unsaved change")
        time.sleep(2.0)
        program.end(signal.SIGKILL)
        copies = list((home / "stillgate" / "recovery").glob("*.ron"))
        if len(copies) != 1:
            raise Fault(f"after kill -9 there are {len(copies)} recovery copies")
        if copies[0].read_text(encoding="utf-8").count("name:") <= file.read_text(encoding="utf-8").count("name:"):
            raise Fault("the recovery copy lacks the new row")
        program = Program(binary, file, home)
        program.resize(*SIZES[0])
        program.shot(folder / "crash-after.png", SIZES[0])
        # The first button of the dialog opens the copy.
        program.key("Tab")
        program.key("Return")
        for _ in range(50):
            if program.title().startswith("*"):
                break
            time.sleep(0.05)
        else:
            raise Fault(f"the copy was not opened from the dialog: {program.title()}")
        program.end()


def main():
    arguments = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    arguments.add_argument("--into", type=pathlib.Path)
    arguments.add_argument("--assets", action="store_true")
    arguments.add_argument("--binary", type=pathlib.Path)
    arguments.add_argument("--only")
    options = arguments.parse_args()
    absent = [tool for tool in TOOLS if shutil.which(tool) is None]
    if absent:
        sys.exit(f"missing: {', '.join(absent)}; see the packages at the top of {__file__}")
    binary = options.binary
    if binary is None:
        subprocess.run(["cargo", "build", "--quiet"], cwd=ROOT, check=True)
        binary = ROOT / "target" / "debug" / "stillgate"
    folder = options.into or pathlib.Path(tempfile.mkdtemp(prefix="stillgate-pictures-"))
    folder.mkdir(parents=True, exist_ok=True)
    samples = sorted(path.stem for path in (ROOT / "projects").glob("*.ron"))
    if options.only:
        samples = [options.only]
    every_look = [(theme, size) for size in SIZES for theme in ("light", "dark")]
    faults, starts = [], []
    display = Display()
    try:
        for number, sample in enumerate(samples):
            closely = sample in CLOSELY or options.only
            looks = every_look if closely else [every_look[number % len(every_look)]]
            starts.append(visit(binary, sample, looks, folder, faults))
            print(f"{sample}: seen in {len(looks)} look{'s' if len(looks) > 1 else ''}", flush=True)
        if not options.only:
            crash(binary, folder)
            print("killed and recovered")
    except Fault as fault:
        faults.append(str(fault))
    finally:
        display.close()
    if options.assets and not faults:
        for sample, station, theme in ASSETS:
            source = folder / f"{sample}-{station}-{theme}-{SIZES[0][0]}.png"
            target = ROOT / "assets" / f"{station}.png"
            # As many colours as a palette holds: half the size, and no difference to the eye.
            run("convert", str(source), "-dither", "None", "-colors", "255", "-define", "png:compression-level=9",
                f"PNG8:{target}")
            print(f"wrote {target.relative_to(ROOT)}")
    if starts:
        print(f"start to the window on the screen: {sorted(starts)[len(starts) // 2]:.2f} s (median)")
    print(f"pictures in {folder}")
    if faults:
        sys.exit("\n".join(faults))


if __name__ == "__main__":
    main()
