#!/usr/bin/env python3
"""Checks which room includes which: the table below is the architecture, and a wrong include fails the tests.

    python3 tests/check_arrows.py ROOT

A public header formsieve/X.hpp belongs to room X, or to the room that FURTHER names. "X:" in the table allows only that public header (the result types of X).
"""
import pathlib
import re
import sys

# room: (rooms whose headers it may include, prefixes of outside headers it may include)
EIGEN = ("Eigen/",)
BOOST_MATH = ("boost/math/", "boost/multiprecision/")
ARROWS = {
    "base": ([], ("tbb/", "hwy/", "boost/multiprecision/") + EIGEN),
    "table": (["base"], ("fast_float/", "sqlite3.h", "openssl/")),
    "forms": (["base"], BOOST_MATH),
    "survey": (["base", "table", "forms"], BOOST_MATH),
    "design": (["base", "table", "forms"], ("hwy/",) + EIGEN),
    "search": (["base"], ("boost/multiprecision/", "hwy/")),
    "proof": (["base", "search"], ("boost/multiprecision/", "hwy/") + EIGEN),
    "fit": (["base"], EIGEN),
    "checks": (["base", "design", "forms", "fit:"], EIGEN + BOOST_MATH),
    "backtransform": (["base", "design", "forms", "fit:"], EIGEN + BOOST_MATH),
    "model": (["base", "forms", "backtransform"], ()),
    "judge": (["base", "forms:", "fit:", "checks:", "backtransform:"], BOOST_MATH),
    "run": (["base", "judge:"], ("toml++/", "nlohmann/")),
    "report": (["base", "forms", "survey:", "judge:", "fit:", "checks:", "backtransform:", "model:", "run:"], ("nlohmann/", "xlsxwriter")),
    "pipeline": (["base", "table", "forms", "survey", "design", "search", "proof", "fit", "checks", "backtransform", "model",
                  "judge",
                  "run", "report"],
                 ("spdlog/",) + EIGEN),
}
# Public headers of a room beside the one that bears its name.
FURTHER = {"comparison": "judge"}
INCLUDE = re.compile(r'^\s*#\s*include\s*([<"])([^>"]+)[>"]')
SYSTEM = {"sys", "fcntl.h", "unistd.h", "time.h", "sched.h"}


def room_of(header):
    """(room, is public) of an included header of ours, or None."""
    parts = pathlib.PurePosixPath(header).parts
    if len(parts) == 2 and parts[0] == "formsieve":
        stem = pathlib.PurePosixPath(parts[1]).stem
        return FURTHER.get(stem, stem), True
    if len(parts) >= 2 and parts[0] in ARROWS:
        return parts[0], False
    return None


def is_standard(header):
    return "/" not in header and "." not in header or header.split("/")[0] in SYSTEM


def faults_of_room(room, file, root):
    allowed, outside = ARROWS[room]
    for number, line in enumerate(file.read_text(encoding="utf-8").splitlines(), 1):
        match = INCLUDE.match(line)
        if not match:
            continue
        header = match.group(2)
        target = room_of(header)
        where = f"{file.relative_to(root)}:{number}"
        if target is None:
            local = match.group(1) == '"' and (file.parent / header).exists()
            if not is_standard(header) and not header.startswith(outside) and not local:
                yield f"{where}: room {room} may not include <{header}>"
            continue
        name, public = target
        if name == room or name in allowed or (public and name + ":" in allowed):
            continue
        yield f"{where}: room {room} may not include \"{header}\" of room {name}"


def faults_of_cli(file, root):
    for number, line in enumerate(file.read_text(encoding="utf-8").splitlines(), 1):
        match = INCLUDE.match(line)
        if match and room_of(match.group(2)) is not None and not match.group(2).startswith("formsieve/"):
            yield f"{file.relative_to(root)}:{number}: cli may include only <formsieve/…>"


def sources(folder):
    return sorted(p for p in folder.rglob("*") if p.suffix in (".cpp", ".hpp", ".h", ".in"))


def main():
    root = pathlib.Path(sys.argv[1] if len(sys.argv) > 1 else ".").resolve()
    faults = []
    checked = 0
    for room in ARROWS:
        for file in sources(root / "engine" / room) + sources(root / "engine" / "include" / "formsieve"):
            if file.parent.name == "formsieve" and FURTHER.get(file.stem, file.stem) != room:
                continue
            checked += 1
            faults += faults_of_room(room, file, root)
    for file in sources(root / "cli"):
        checked += 1
        faults += faults_of_cli(file, root)
    unknown = [p.name for p in (root / "engine").iterdir() if p.is_dir() and p.name not in ARROWS and p.name != "include"]
    faults += [f"engine/{name}: a room that the table of arrows does not know" for name in unknown]
    print(f"{checked} files read, {len(faults)} wrong arrows")
    for fault in faults:
        print(fault)
    return 1 if faults or checked < len(ARROWS) else 0


if __name__ == "__main__":
    sys.exit(main())
