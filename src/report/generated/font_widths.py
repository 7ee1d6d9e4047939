#!/usr/bin/env python3
"""Writes font_widths.hpp: advance widths of the figures' typeface, read from the font files.

Needs python3-fonttools and fonts-linuxlibertine. Run: ./font_widths.py > font_widths.hpp
"""
from fontTools.ttLib import TTFont

FOLDER = "/usr/share/fonts/opentype/linux-libertine/"


def widths(name):
    font = TTFont(FOLDER + name)
    glyphs, advances, em = font.getBestCmap(), font["hmtx"], font["head"].unitsPerEm
    return [round(1000 * advances[glyphs[code]][0] / em) for code in range(0x20, 0x7F)]


def table(constant, name):
    numbers = [f"{width}," for width in widths(name)]
    rows = [" ".join(numbers[i:i + 19]) for i in range(0, len(numbers), 19)]
    body = "\n    ".join(rows).rstrip(",")
    return f"inline constexpr std::array<int, 95> {constant} = {{\n    {body}}};"


print("// Advance widths of U+0020 to U+007E in 1/1000 em. Written by font_widths.py; do not edit.")
print("// Source: table hmtx of the fonts Linux Biolinum O, version 5.3.0.")
print("#pragma once\n\n#include <array>\n\nnamespace trotline {\n")
print(table("kRegularWidths", "LinBiolinum_R.otf") + "\n")
print(table("kBoldWidths", "LinBiolinum_RB.otf") + "\n")
print("}  // namespace trotline")
