#!/bin/sh
# Makes every reference value again. Run: tests/reference/run.sh [GENERATOR ...]
#
# Python libraries come from requirements.txt into target/reference-python, unless COURSEBAND_PYTHON
# names a Python that has them. What changed is then shown by `git diff --stat`.
set -eu
cd "$(dirname "$0")"
# One thread: sums of matrices are then taken in one order, and the last digits stay.
export OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1
engine=../../crates/courseband-engine/tests/data
python=${COURSEBAND_PYTHON:-}
if [ -z "$python" ]; then
    place=../../target/reference-python
    [ -x "$place/bin/python" ] || python3 -m venv "$place"
    "$place/bin/python" -m pip install --quiet --disable-pip-version-check --requirement requirements.txt
    python=$place/bin/python
fi

# To a file beside the target first, so that a generator that stops leaves the old values.
printed() {
    "$python" "$1.py" > "$2.new"
    mv "$2.new" "$2"
}

[ $# -gt 0 ] || set -- demos made_up special max_quantile usual visits usual_tables mixed dense housed families power links
for generator; do
    echo "$generator"
    case $generator in
        demos) "$python" ../../demo-data/make.py ;;
        special | max_quantile) printed "$generator" "$engine/$generator.csv" ;;
        made_up | usual | visits | usual_tables | mixed | dense | housed | families | power | links) "$python" "$generator.py" ;;
        *) echo "$generator is none of: demos made_up special max_quantile usual visits usual_tables mixed dense housed families power links" >&2; exit 2 ;;
    esac
done
