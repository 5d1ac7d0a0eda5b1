"""Prime implicants by sympy's Quine-McCluskey.

Reads a JSON list of {"variables": n, "points": [p, ..]}, the points where a function is 1 or free, bit i of p for variable
i; prints, for each, the sorted list of its primes as strings over 0, 1, - with variable 0 first.
"""

import json
import sys

# The simplifier's own step: it joins terms that differ in one place, and returns those that did not join any further.
from sympy.logic.boolalg import _simplified_pairs


def primes(variables, points):
    terms = [[p >> i & 1 for i in range(variables)] for p in points]
    before = None
    while before != terms:
        before = terms
        terms = _simplified_pairs(terms)
    return sorted("".join("-" if bit == 3 else str(bit) for bit in term) for term in terms)


json.dump([primes(case["variables"], case["points"]) for case in json.load(sys.stdin)], sys.stdout)
