"""Run all benchmarks but the soak, which takes half an hour: ``python -m tests.benchmarks``."""

from tests.benchmarks import bench_compute, bench_history, bench_idle, bench_poll, bench_replay, bench_start

for bench in (bench_compute, bench_replay, bench_poll, bench_start, bench_idle, bench_history):
    print(f"-- {bench.__name__.rpartition('.')[2]}: {(bench.__doc__ or '').splitlines()[0]}", flush=True)
    bench.main()
    print(flush=True)
