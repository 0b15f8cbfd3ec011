"""Columns of characters on a terminal, by the Unicode database of Python's own unicodedata."""
import json
import unicodedata

ranges = []
for code in range(0x300, 0x40000):
    if unicodedata.category(chr(code)) in ("Cn", "Co", "Cs"):
        continue
    if unicodedata.east_asian_width(chr(code)) in ("W", "F"):
        if ranges and ranges[-1][1] == code - 1:
            ranges[-1][1] = code
        else:
            ranges.append([code, code])
print(json.dumps({"unicode": unicodedata.unidata_version, "wide": ranges}))
