"""Truss files with loads as engineers have them, which the tests of envelope and influence sheets share.

All are invented. The forces of FOOTWAY are worked out by hand beside the tests that use them: six metres deep, panels
of six metres, so that chords are moments over six and the diagonals stand under 45 degrees.
"""

from __future__ import annotations

FOOTWAY = """\
format = 1
title = "Linden Quay footway bridge"
[joints]
L0 = [0, 0]
L1 = [6, 0]
L2 = [12, 0]
L3 = [18, 0]
L4 = [24, 0]
U1 = [6, 6]
U2 = [12, 6]
U3 = [18, 6]
[members]
"lower chord" = ["L0-L1", "L1-L2", "L2-L3", "L3-L4"]
"upper chord" = ["U1-U2", "U2-U3"]
"end posts" = ["L0-U1", "U3-L4"]
posts = ["U1-L1", "U2-L2", "U3-L3"]
diagonals = ["U1-L2", "L2-U3"]
[supports]
L0 = "pin"
L4 = "roller"
[chains.deck]
joints = ["L0", "L1", "L2", "L3", "L4"]
[[panel_loads.dead]]
line = 10
along = "deck"
[trains.sweeper]
axles = [40, 80]
spacing = [3]
impact = "0.25"
lane = 5
[moving.live]
train = "sweeper"
along = "deck"
[combinations.heavy]
dead = ["1.35", "0.9"]
live = "1.5"
[combinations."dead alone"]
dead = "1.35"
[project]
project = "Linden Quay"
calculation = "LQ-7"
basis = "factored"
self_weight = "included"
"""

ROOF = """\
format = 1
title = "Drying shed roof"
[joints]
A = [0, 0]
B = [4, 0]
C = [8, 0]
D = [12, 0]
E = [2, "1.5"]
F = [6, "4.5"]
G = [10, "1.5"]
[members]
tie = ["A-B", "B-C", "C-D"]
rafters = ["A-E", "E-F", "F-G", "G-D"]
web = ["E-B", "B-F", "F-C", "C-G"]
[supports]
A = "pin"
D = "roller"
[chains.roof]
joints = ["A", "E", "F", "G", "D"]
[chains.left]
joints = ["A", "E", "F"]
[symbols]
P = 3
[cases.hoist]
F = [0, "-P"]
[cases.unused]
B = [0, -1]
[[panel_loads.dead]]
line = "1.2"
along = "roof"
per = "slope"
[[panel_loads.snow]]
area = "0.8"
width = 5
along = "roof"
[[panel_loads."wind left"]]
line = "9"
along = "left"
direction = "normal"
[[panel_loads."wind right"]]
line = "-4"
along = ["F", "G", "D"]
direction = "normal"
[published_combinations]
table = "ASCE/SEI 7-22 strength"
cases = { D = "dead", L = "hoist", S = "snow", W = ["wind left", "wind right"] }
own = { "3a L" = "0.7" }
[combinations.own]
dead = ["1.1", "0.95"]
snow = "1.2"
[behaviour]
tension_only = ["C-D", "B-F"]
no_uplift = ["A", "D"]
"""

BRACED = """\
format = 1
title = "Braced panel"
[joints]
A = [0, 0]
B = [4, 0]
C = [4, 3]
D = [0, 3]
E = [8, 0]
[members]
frame = ["A-B", "B-C", "C-D", "D-A", "A-C", "B-D"]
arm = ["B-E", "C-E"]
[supports]
A = "pin"
B = "roller"
[cases.lamp]
E = [0, -3]
"""
"""Statics decides the arm and not the frame."""
