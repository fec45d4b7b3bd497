#!/usr/bin/env python3
"""Processor time of `isophone measure` with one thread against a plain numpy pipeline, by turns in one run:

    cargo build --release && python3 benches/peer.py [RUNS]

Needs ../shared, and an interpreter with numpy and scipy for the peer: this one, or the one PEER_PYTHON names.
BINARY names another program than target/release/isophone."""
import os, pathlib, resource, statistics, subprocess, sys, tempfile

home = pathlib.Path(__file__).resolve().parent.parent
shared = home.parent / "shared"
words = shared / "data" / "hvd-words"
binary = os.environ.get("BINARY", str(home / "target" / "release" / "isophone"))
python = os.environ.get("PEER_PYTHON", sys.executable)
runs = int(sys.argv[1]) if len(sys.argv) > 1 else 7


def processor_s(command):
    """User and system seconds of one run of a command."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    subprocess.run(command, check=True, stdout=subprocess.DEVNULL)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


with tempfile.TemporaryDirectory() as out:
    ours = [binary, "measure", str(words), "--out", f"{out}/ours", "--threads", "1", "--quiet"]
    peer = [python, str(shared / "peers" / "lpc_numpy.py"), str(words), f"{out}/peer.csv", "group"]
    for command in (ours, peer):  # once unmeasured: files are read from memory afterwards
        processor_s(command)
    pairs = [(processor_s(ours), processor_s(peer)) for _ in range(runs)]

for name, column in (("measure", 0), ("peer", 1)):
    times = sorted(pair[column] for pair in pairs)
    print(f"{name:8} {statistics.median(times):6.2f} s  ({times[0]:.2f} to {times[-1]:.2f}, {runs} runs)")
print(f"ratio    {statistics.median(a / b for a, b in pairs):6.3f}    median of the pairs")
