"""Makes the invented tables in this folder. Run: python3 make.py (standard library only).

Nothing here was measured. The truths behind each table are the numbers in this file;
README.md says them in words. The same seed gives the same bytes.
"""

import datetime
import math
import pathlib
import random

HERE = pathlib.Path(__file__).resolve().parent


def piecewise(points, t):
    """Smooth-stepped course through (time, value) points."""
    if t <= points[0][0]:
        return points[0][1]
    for (t0, v0), (t1, v1) in zip(points, points[1:]):
        if t <= t1:
            x = (t - t0) / (t1 - t0)
            x = x * x * (3 - 2 * x)
            return v0 + (v1 - v0) * x
    return points[-1][1]


def write(name, header, rows):
    lines = [",".join(header)] + [",".join(str(cell) for cell in row) for row in rows]
    (HERE / name).write_text("\n".join(lines) + "\n", encoding="utf-8", newline="\n")


def wounds():
    """Wound area (mm2) of mice on three dressings: long, log scale, gaps and dropout."""
    draw = random.Random(1107)
    days = [0, 2, 4, 7, 9, 11, 14, 16, 18, 21]
    fall = {  # natural log of the area, typical mouse
        "Plain gauze": lambda t: math.log(61) - 0.0017 * t * t - 0.034 * t,
        "Foam pad": lambda t: math.log(61) - 0.0017 * t * t - 0.034 * t - 0.058 * max(0.0, t - 7.0),
        "Gel film": lambda t: math.log(61) - 0.0017 * t * t - 0.034 * t - 0.080 * max(0.0, t - 3.0),
    }
    leave = {"Plain gauze": 0.055, "Foam pad": 0.03, "Gel film": 0.015}
    rows = []
    for dressing, course in fall.items():
        for number in range(1, 13):
            level, trend = draw.gauss(0, 0.06), draw.gauss(0, 0.014)
            gone = False
            for day in days:
                if day > 9 and draw.random() < leave[dressing]:
                    gone = True
                noise = draw.gauss(0, 0.05)
                if gone or (day > 0 and draw.random() < 0.04):
                    continue
                area = math.exp(course(day) + level + trend * day + noise)
                rows.append((f"{dressing[0]}{number:02d}", dressing, day, f"{area:.1f}"))
    draw.shuffle(rows)
    rows.sort(key=lambda row: (row[2], row[0]))
    write("wounds.csv", ("mouse", "dressing", "day", "wound area (mm2)"), rows)


def ferritin():
    """Ferritin (ug/L) in two clinic arms: dates, uneven visits, skewed, missing cells."""
    draw = random.Random(2214)
    first = datetime.date(2023, 1, 9)
    planned = [0, 28, 56, 84, 126, 182]
    rows = []
    for number in range(1, 49):
        arm = "oral weekly" if number % 2 else "infusion"
        level, trend = draw.gauss(0, 0.45), draw.gauss(0, 0.0012)
        begin = first + datetime.timedelta(days=draw.randrange(0, 6))
        gone = False
        for visit, day in enumerate(planned):
            if visit and draw.random() < 0.035:
                gone = True
            if gone:
                continue
            seen = day + (draw.randrange(-5, 6) if visit else 0)
            if arm == "infusion":
                rise = piecewise([(0, 0.0), (35, 1.55), (182, 0.95)], seen)
            else:
                rise = piecewise([(0, 0.0), (110, 0.85), (182, 0.95)], seen)
            value = math.exp(math.log(17) + rise + level + trend * seen + draw.gauss(0, 0.18))
            cell = "" if draw.random() < 0.03 else f"{value:.0f}"
            rows.append((f"P{number:03d}", arm, begin + datetime.timedelta(days=seen), cell))
    write("ferritin.csv", ("patient", "arm", "visit date", "ferritin (ug/L)"), rows)


def weights():
    """Body weight (g) of animals in cages on three diets: wide, one column per week."""
    draw = random.Random(3321)
    weeks = [0, 1, 2, 3, 4, 5, 6, 8, 10, 12]
    gain = {
        "standard": [(0, 21.0), (6, 24.6), (12, 26.4)],
        "high fat": [(0, 21.0), (6, 28.2), (12, 35.2)],
        "high fat + fibre": [(0, 21.0), (6, 26.4), (12, 31.0)],
    }
    rows = []
    cage = 0
    for diet, course in gain.items():
        for _ in range(4):
            cage += 1
            shared, shared_trend = draw.gauss(0, 0.5), draw.gauss(0, 0.06)
            for animal in range(1, 4):
                level, trend = draw.gauss(0, 1.0), draw.gauss(0, 0.07)
                error, cells = 0.0, []
                for k, week in enumerate(weeks):
                    carry = 0.6 ** (week - weeks[k - 1]) if k else 0.0
                    error = carry * error + math.sqrt(1 - carry * carry) * draw.gauss(0, 0.45)
                    value = piecewise(course, week) + shared + level + (shared_trend + trend) * week + error
                    cells.append("" if k and draw.random() < 0.02 else f"{value:.1f}")
                rows.append((f"c{cage}-{animal}", diet, f"cage {cage}", *cells))
    write("weights.csv", ("animal", "diet", "cage", *(f"week {week}" for week in weeks)), rows)


def colonies():
    """Colonies on plates under two washes: counts that scatter more than chance, some days not counted."""
    draw = random.Random(4507)
    days = [0, 1, 2, 3, 5, 7]
    rows = []
    for plate in range(1, 31):
        wash = "plain wash" if plate % 2 else "acid wash"
        level = draw.gauss(0, 0.25)
        for day in days:
            if day and draw.random() < 0.04:
                continue
            grown = piecewise([(0, 0.0), (3, 1.1), (7, 1.9)] if wash == "plain wash" else [(0, 0.0), (3, 0.75), (7, 0.9)], day)
            mean = math.exp(math.log(12) + grown + level) * draw.gammavariate(12, 1 / 12)
            product, count = draw.random(), 0
            while product > math.exp(-mean):
                product, count = product * draw.random(), count + 1
            rows.append((f"plate {plate}", wash, f"{day}", f"{count}"))
    write("colonies.csv", ("plate", "wash", "day", "colonies"), rows)


if __name__ == "__main__":
    wounds()
    ferritin()
    weights()
    colonies()
