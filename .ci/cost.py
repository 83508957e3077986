#!/usr/bin/env python3
"""CPU seconds and peak memory of whole `issue` processes, against the limits of the project.

usage: cost.py PROGRAM PROBLEM

Runs the program several times into fresh folders and reads what the kernel charged each process (wait4: user plus
system time, largest resident set). The median is printed and judged.
"""

import os
import statistics
import sys
import tempfile

RUNS = 7
CPU_LIMIT_S = 0.5
MEMORY_LIMIT_MIB = 100


def one_run(program: str, problem: str) -> tuple[float, float]:
    with tempfile.TemporaryDirectory() as into:
        silent = os.open(os.devnull, os.O_WRONLY)
        child = os.posix_spawn(program, [program, "issue", problem, "--into", into], os.environ, file_actions=[(os.POSIX_SPAWN_DUP2, silent, 1)])
        _, status, usage = os.wait4(child, 0)
        os.close(silent)
        assert os.waitstatus_to_exitcode(status) in (0, 1), f"exit status {os.waitstatus_to_exitcode(status)}"
    return usage.ru_utime + usage.ru_stime, usage.ru_maxrss / 1024


def main() -> int:
    runs = [one_run(sys.argv[1], sys.argv[2]) for _ in range(RUNS)]
    cpu_s, memory_mib = (statistics.median(column) for column in zip(*runs))
    print(f"median of {RUNS}: {cpu_s:.3f} s CPU (limit {CPU_LIMIT_S}), {memory_mib:.1f} MiB (limit {MEMORY_LIMIT_MIB})")
    return 0 if cpu_s <= CPU_LIMIT_S and memory_mib <= MEMORY_LIMIT_MIB else 1


if __name__ == "__main__":
    sys.exit(main())
