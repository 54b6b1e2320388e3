#!/bin/sh
# Runs the self-checking bench of {{ cell }}: ./run.sh [icarus | verilator]
# Without a word it takes the first of the two that is found. Exit code 0 means PASS.
# {{ standing }}
set -eu
cd "$(dirname "$0")"
found() { command -v "$1" >/dev/null 2>&1; }

# First that all files are as they were packed.
if found sha256sum; then sha256sum -c MANIFEST.sha256 >work.log || { cat work.log; exit 1; }
elif found shasum; then shasum -a 256 -c MANIFEST.sha256 >work.log || { cat work.log; exit 1; }
else echo "neither sha256sum nor shasum is here: the files are not verified"; fi
rm -f work.log

simulator=${1:-}
if [ -z "$simulator" ]; then
  if found iverilog; then simulator=icarus
  elif found verilator; then simulator=verilator
  else echo "no simulator found: README.txt shows the compile lines"; exit 4; fi
fi
rm -rf work
mkdir work

case "$simulator" in
  icarus)
    iverilog -g2012 -s {{ cell }}_bench -o work/bench.vvp -c files.f -c bench.f
    vvp -n work/bench.vvp
    ;;
  verilator)
    # Fused multiply-add would change the last place of noise samples. Parallel builds need no more
    # than a compiler and make.
    verilator --binary --timing -Wno-fatal -j 2 -MAKEFLAGS VM_PARALLEL_BUILDS=1 \
      -CFLAGS -ffp-contract=off --top-module {{ cell }}_bench --Mdir work -o bench \
      ${VERILATOR_OPTIONS:-} -f files.f -f bench.f >work/build.log 2>&1 ||
      { cat work/build.log; exit 1; }
    work/bench
    ;;
  *)
    echo "usage: ./run.sh [icarus | verilator]"
    exit 2
    ;;
esac
