"""Processor time (user and system) and largest memory of whole runs of a program.

Run: python3 tests/bench/cpu.py 15 target/release/lineclear window 585..590nm --of Na,Ne,He --catalogue /tmp/c.sqlite
With FRESH=/tmp/c.sqlite in the environment that file is removed before each run: the first build.
"""
import os
import statistics
import subprocess
import sys

times, memory, ends = [], [], set()
for _ in range(int(sys.argv[1])):
    for tail in ("", "-wal", "-shm"):
        if "FRESH" in os.environ and os.path.exists(os.environ["FRESH"] + tail):
            os.remove(os.environ["FRESH"] + tail)
    process = subprocess.Popen(sys.argv[2:], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    _, status, used = os.wait4(process.pid, 0)
    times.append(1e3 * (used.ru_utime + used.ru_stime))
    memory.append(used.ru_maxrss / 1024)
    ends.add(os.waitstatus_to_exitcode(status))
times.sort()
print(f"median {statistics.median(times):.1f} ms, {times[0]:.1f} to {times[-1]:.1f}, {max(memory):.1f} MiB, exit {ends}")
