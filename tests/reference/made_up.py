"""Writes data/uneven.csv, data/spread.csv, data/housed.csv and data/colonies.csv: invented tables for the dense reference, seeded."""

import math
import pathlib
import random

HERE = pathlib.Path(__file__).resolve().parent / "data"


def uneven():
    draw = random.Random(41)
    lines = ["subject,group,time,y"]
    for s in range(16):
        level, state, previous = draw.gauss(0, 0.8), draw.gauss(0, 0.9), None
        times = sorted(round(draw.uniform(0, 12) * 2) / 2 for _ in range(8))
        for t in times:
            if previous is not None and t > previous:
                carry = 0.7 ** (t - previous)
                state = carry * state + math.sqrt(1 - carry * carry) * draw.gauss(0, 0.9)
            previous = t
            mean = math.sin(t / 2) * (1 + s % 2) + 5
            lines.append(f"u{s},{'ab'[s % 2]},{t},{mean + level + state + draw.gauss(0, 0.4):.4f}")
    (HERE / "uneven.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


def spread():
    draw = random.Random(42)
    lines = ["subject,group,time,y"]
    for s in range(20):
        wide = 3.0 if s % 2 else 1.0
        level, trend = draw.gauss(0, wide), draw.gauss(0, 0.1 * wide)
        for t in [0, 1, 2, 4, 6, 9, 13]:
            if t and draw.random() < 0.1:
                continue
            y = 10 + math.sqrt(t + 1) * (1 + 0.3 * (s % 2)) + level + trend * t + draw.gauss(0, 0.5 * wide)
            lines.append(f"v{s},{'ab'[s % 2]},{t},{y:.4f}")
    (HERE / "spread.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


def housed():
    """Twelve cages of three, two treatments given by the cage; a second factor and a weight at the start."""
    draw = random.Random(43)
    lines = ["subject,group,cage,sex,weight,time,y"]
    for cage in range(12):
        level, trend = draw.gauss(0, 0.8), draw.gauss(0, 0.15)
        for s in range(3):
            own, weight, sex = draw.gauss(0, 0.6), draw.gauss(20, 2), "fm"[draw.random() < 0.4]
            slope, bend = draw.gauss(0, 0.1), draw.gauss(0, 0.5)
            for t in [0, 1, 2, 3, 5, 7, 10]:
                if t and draw.random() < 0.1:
                    continue
                mean = 8 + math.sqrt(t + 1) * (1 + 0.4 * (cage % 2)) + 0.2 * (weight - 20) + 0.5 * (sex == "m")
                y = mean + level + trend * t + own + slope * t + bend * math.sin(t / 2) + draw.gauss(0, 0.3)
                lines.append(f"h{cage}-{s},{'ab'[cage % 2]},cage {cage + 1},{sex},{weight:.1f},{t},{y:.4f}")
    (HERE / "housed.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


def colonies():
    """Colonies on plates over days in two arms; at least one each, so that a gamma response can be tried too."""
    draw = random.Random(44)
    lines = ["subject,group,time,y"]
    for s in range(24):
        for t in range(6):
            mean = math.exp(1.0 + 0.15 * t * (1 + s % 2))
            product, count = draw.random(), 0
            while product > math.exp(-mean):
                product, count = product * draw.random(), count + 1
            lines.append(f"p{s},{'ab'[s % 2]},{t},{count + 1}")
    (HERE / "colonies.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    uneven()
    spread()
    housed()
    colonies()
