#!/usr/bin/env python3
"""Reads every #include of the project and fails where a floor reaches below its own, where a third-party header has
left its home, or where a public header shows anything but the standard library and the project's own types.

    floors.py SOURCE_DIR
    floors.py --self-test
"""
import pathlib
import re
import sys
import tempfile

TOWER = ["base", "numeric", "recording", "spectral", "rotation", "modal", "machine", "absorber", "step", "survey",
         "report", "cli"]
MAY_USE = {floor: set(TOWER[: i + 1]) for i, floor in enumerate(TOWER)}
MAY_USE["simulate"] = {"base", "numeric", "recording", "simulate"}
MAY_USE["cli"].add("simulate")

# Third-party headers (by their beginning) and where each may stand; a home that ends in / is a folder.
HOMES = {
    "fftw3": ["src/spectral/fft.cpp"],
    "sndfile": ["src/recording/sound_reader.cpp", "src/recording/writer.cpp"],
    "toml": ["src/base/settings.cpp"],
    "nlohmann/": ["src/report/json_parts.hpp", "src/report/result_read.cpp"],
    "CLI/": ["src/cli/"],
    "Eigen/": ["src/numeric/"],
    "unsupported/Eigen": [],
    "boost/": ["src/numeric/"],
    "nettle/": ["src/base/digest.cpp"],
    "Random123/": ["src/numeric/random.cpp"],
    "fmt/": ["src/"],
}
# These cost many seconds a file wherever they are included.
HEAVY = re.compile(r"Eigen/(Dense|Eigen|Eigenvalues|SVD|QR|LU)\b")
HEAVY_HOME = "src/numeric/decomposition.cpp"
INCLUDE = re.compile(r'^\s*#\s*include\s*([<"])([^>"]+)[>"]', re.M)
SYSTEM = ("sys/", "arpa/", "netinet/")


def floor_of(path):
    parts = path.parts
    if parts[:2] == ("include", "stillmass"):
        return parts[2]
    return parts[1]


def at_home(header, path):
    for beginning, homes in HOMES.items():
        if header.startswith(beginning):
            return any(path == home or (home.endswith("/") and path.startswith(home)) for home in homes)
    return None


def faults(root):
    found = []
    files = sorted(p for folder in ("src", "include") for p in (root / folder).rglob("*") if p.suffix in (".cpp", ".hpp"))
    for file in files:
        path = file.relative_to(root)
        floor = floor_of(path)
        if floor not in MAY_USE:
            found.append(f"{path}: {floor} is not a floor of the house")
            continue
        public = path.parts[0] == "include"
        for kind, header in INCLUDE.findall(file.read_text(encoding="utf-8")):
            own = re.match(r"(?:stillmass/)?([a-z_]+)/", header) if kind == '"' else None
            if own:
                used = own.group(1)
                if used not in MAY_USE[floor]:
                    found.append(f"{path}: the floor {floor} must not use {used} ({header})")
                if not header.startswith("stillmass/") and (public or used != floor):
                    found.append(f"{path}: {header} is private to the floor {used}")
                continue
            home = at_home(header, str(path))
            if home is False:
                found.append(f"{path}: {header} has left its home")
            if HEAVY.match(header) and str(path) != HEAVY_HOME:
                found.append(f"{path}: {header} belongs in {HEAVY_HOME}")
            if home is None and (kind == '"' or "/" in header and not header.startswith(SYSTEM)):
                found.append(f"{path}: {header} is not of the standard library and has no home")
            if public and home is not None:
                found.append(f"{path}: a public header must not show {header}")
    if not files:
        found.append("no sources were found")
    return found


def self_test():
    wrong = {
        "include/stillmass/modal/a.hpp": '#include "stillmass/absorber/b.hpp"\n',
        "src/simulate/a.cpp": '#include "stillmass/spectral/b.hpp"\n',
        "src/spectral/other.cpp": "#include <fftw3.h>\n",
        "include/stillmass/numeric/m.hpp": "#include <Eigen/Core>\n",
        "src/numeric/fit.cpp": "#include <Eigen/SVD>\n",
        "src/report/x.cpp": '#include "modal/private.hpp"\n',
        "src/attic/x.cpp": "\n",
        "src/base/x.cpp": "#include <curl/curl.h>\n",
    }
    right = {
        "src/modal/ok.cpp": '#include "stillmass/spectral/b.hpp"\n#include "modal/private.hpp"\n#include <vector>\n',
        "src/cli/ok.cpp": '#include "stillmass/simulate/b.hpp"\n#include <CLI/CLI.hpp>\n#include <sys/stat.h>\n',
    }
    for path, text in {**wrong, **right}.items():
        with tempfile.TemporaryDirectory() as folder:
            file = pathlib.Path(folder) / path
            file.parent.mkdir(parents=True)
            file.write_text(text, encoding="utf-8")
            found = faults(pathlib.Path(folder))
            if bool(found) != (path in wrong):
                sys.exit(f"self-test: {path} gave {found}")


if __name__ == "__main__":
    if sys.argv[1:] == ["--self-test"]:
        self_test()
    else:
        problems = faults(pathlib.Path(sys.argv[1]))
        print("\n".join(problems))
        sys.exit(1 if problems else 0)
