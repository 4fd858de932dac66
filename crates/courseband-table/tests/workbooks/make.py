"""Workbooks as libraries write them: packed, with styles, dates, shared texts, merged heads. Needs openpyxl and odfpy.

The numbers are made up by a rule. `python make.py` writes plants.xlsx and plants.ods here.
"""
import datetime
from pathlib import Path

import odf.opendocument
import odf.table
import odf.text
import openpyxl

HERE = Path(__file__).parent
START = datetime.date(2024, 3, 4)
ROWS = [
    (f"p{plant}", "late" if plant % 2 else "early", START + datetime.timedelta(days=7 * week),
     round(10 + plant * 0.5 + week * (1.5 if plant % 2 else 2.25) + (plant * 7 + week * 3) % 5 * 0.1, 2))
    for plant in range(6) for week in range(4)
]


def xlsx():
    book = openpyxl.Workbook()
    about = book.active
    about.title = "About"
    about["A1"] = "Made up by a rule"
    sheet = book.create_sheet("Long & plain")
    sheet.append(["plant", "sowing", "date", "height (cm)"])
    for row in ROWS:
        sheet.append(list(row))
    for cell in sheet["C"][1:]:
        cell.number_format = "dd.mm.yyyy"
    wide = book.create_sheet("Wide")
    wide.append(["", "early", "", "", "late", "", ""])
    wide.merge_cells("B1:D1")
    wide.merge_cells("E1:G1")
    wide.append(["week", "p0", "p2", "p4", "p1", "p3", "p5"])
    for week in range(4):
        wide.append([week] + [ROWS[plant * 4 + week][3] for plant in (0, 2, 4, 1, 3, 5)])
    wide["J1"] = "=SUM(B3:B6)"
    book.save(HERE / "plants.xlsx")


def ods():
    document = odf.opendocument.OpenDocumentSpreadsheet()
    table = odf.table.Table(name="Long & plain")
    document.spreadsheet.addElement(table)
    for row in [("plant", "sowing", "date", "height (cm)"), *ROWS]:
        line = odf.table.TableRow()
        for value in row:
            if isinstance(value, datetime.date):
                cell = odf.table.TableCell(valuetype="date", datevalue=value.isoformat())
            elif isinstance(value, float):
                cell = odf.table.TableCell(valuetype="float", value=str(value))
            else:
                cell = odf.table.TableCell(valuetype="string")
            cell.addElement(odf.text.P(text=str(value)))
            line.addElement(cell)
        table.addElement(line)
    document.save(HERE / "plants.ods")


xlsx()
ods()
