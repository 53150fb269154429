"""Processes of closed systems: their relations, kind by kind, and what is reported of them.

A process takes fixed amounts of fluids from the states ``from`` to the states ``to``. Heat is positive into the system
and work positive out of it, ΔU = Q − W. ``kinds`` holds one module a kind; ``equations`` what they share; ``mixing``
gases that become one another's mixture; ``accounting`` entropy, lost work, totals and closures.
"""
