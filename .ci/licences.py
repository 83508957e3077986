#!/usr/bin/env python3
"""Supply chain: every crate that is compiled, for any platform, must be under a permissive licence.

Reads `cargo tree` (features as resolved, so an optional dependency that is switched off does not count). A crate
passes if its licence expression can be satisfied by the list below alone: of `A OR B` one is enough, of `A AND B`
both are needed. Some crates are refused by name, for what they would do to the bytes or to the licence.
"""

import re
import subprocess
import sys

ALLOWED = {
    "0BSD",
    "Apache-2.0",
    "Apache-2.0 WITH LLVM-exception",
    "BSD-2-Clause",
    "BSD-3-Clause",
    "BSL-1.0",
    "CC0-1.0",
    "ISC",
    "MIT",
    "Unicode-3.0",
    "Unlicense",
    "Zlib",
}

# Name: why it is refused. A deflate other than miniz_oxide changes the bytes of every PDF.
REFUSED = {
    "zlib-rs": "another deflate: the bytes of every PDF would change",
    "libz-ng-sys": "another deflate, in C",
    "libz-sys": "another deflate, in C",
    "cloudflare-zlib-sys": "another deflate, in C",
    "zstd-sys": "C code",
    "iana-time-zone": "chrono's clock: the local time of this machine",
}

# Features that must stay off.
REFUSED_FEATURES = {
    "chrono": {"clock", "now"},
    "flate2": {"zlib-rs", "zlib-ng", "zlib"},
}


def tree(edges: str, form: str) -> list[list[str]]:
    command = ["cargo", "tree", "--locked", "--target", "all", "--edges", edges, "--prefix", "none", "--format", form]
    lines = subprocess.run(command, check=True, capture_output=True, text=True).stdout.splitlines()
    return sorted({line.removesuffix(" (*)") for line in lines if line.strip()})


def permitted(expression: str) -> bool:
    """Whether the allow-list satisfies an SPDX expression; `MIT/Apache-2.0` is the old spelling of OR."""
    tokens = re.findall(r"\(|\)|[^\s()]+", expression.replace("/", " OR "))
    position = 0

    def peek() -> str | None:
        return tokens[position] if position < len(tokens) else None

    def take() -> str:
        nonlocal position
        position += 1
        return tokens[position - 1]

    def either() -> bool:
        value = both()
        while peek() == "OR":
            take()
            value = both() or value
        return value

    def both() -> bool:
        value = one()
        while peek() == "AND":
            take()
            value = one() and value
        return value

    def one() -> bool:
        if peek() == "(":
            take()
            value = either()
            assert take() == ")", expression
            return value
        name = take()
        if peek() == "WITH":
            take()
            name = f"{name} WITH {take()}"
        return name in ALLOWED

    value = either()
    assert peek() is None, f"cannot read the licence expression {expression!r}"
    return value


def self_check() -> None:
    """The reader of expressions, on expressions whose answer is plain."""
    for expression, answer in {
        "MIT": True,
        "MIT/GPL-3.0-only": True,
        "GPL-3.0-only": False,
        "AGPL-3.0-only": False,
        "MIT AND MPL-2.0": False,
        "(MIT OR Apache-2.0) AND Unicode-3.0": True,
        "MIT OR Apache-2.0 OR LGPL-2.1-or-later": True,
        "Apache-2.0 WITH LLVM-exception": True,
        "GPL-2.0-only WITH Classpath-exception-2.0": False,
    }.items():
        assert permitted(expression) == answer, expression


def main() -> int:
    self_check()
    faults = []
    packages = [line.split("\t") for line in tree("normal,build,dev", "{p}\t{l}")]
    assert len(packages) > 100, "cargo tree printed no tree"
    for package, licence in packages:
        name, version = package.split()[:2]
        if not licence:
            faults.append(f"{name} {version} states no licence")
        elif not permitted(licence):
            faults.append(f"{name} {version} is under {licence}")
        if name in REFUSED:
            faults.append(f"{name} {version} is refused: {REFUSED[name]}")
        if name == "evalexpr" and not version.startswith("v11."):
            faults.append(f"evalexpr {version} is refused: version 12 and later are under the AGPL")
    for line in tree("normal,build,dev", "{p}\t{f}"):
        package, _, features = line.partition("\t")
        name = package.split()[0]
        for feature in REFUSED_FEATURES.get(name, set()) & set(features.split(",")):
            faults.append(f"feature {feature} of {name} is refused")
    for fault in faults:
        print(fault)
    print(f"{len(packages)} crates, {len(faults)} faults")
    return 1 if faults else 0


if __name__ == "__main__":
    sys.exit(main())
