"""Run a command; print its seconds, those that it computed, its peak memory and its exit status.

A process is charged with the memory of the one that started it, so that a small one has to do it.
"""

import os
import sys
import time

start = time.perf_counter()
child = os.posix_spawn(sys.argv[1], sys.argv[1:], os.environ)
_, status, usage = os.wait4(child, 0)
took = time.perf_counter() - start
busy = usage.ru_utime + usage.ru_stime
sys.stderr.write(f"\n{took} {busy} {usage.ru_maxrss} {os.waitstatus_to_exitcode(status)}\n")
