"""Random sets of beads through the program, against SciPy's shortest paths (scipy.sparse.csgraph.floyd_warshall).

For each set: `bounds` has SciPy's upper limits, and the lower limits that follow from them by Dress & Havel (Discrete Appl. Math.
19 (1988) 129); `check` finds a contradiction exactly when a given lower limit exceeds the shortest path, and each chain it gives is
a proof by its own figures: it closes, its steps are the user's limits, and lower less sum of uppers is the excess that it tells.
"""
import json
import os
import random
import subprocess
import sys
import tempfile

import numpy
from scipy.sparse.csgraph import floyd_warshall

PROGRAM = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'trammel')
SETS, ROUNDING = 120, 2e-4  # Å: four decimals in the table, and single precision rounded outwards


def random_set(generator):
    """Bead count and limits (a, b, lower, upper) that are consistent or not, as chance has it; all pairs may lack a limit."""
    beads = generator.randint(2, 25)
    points = [[generator.uniform(0, 20) for _ in range(3)] for _ in range(beads)]
    noise = generator.choice([0.0, 0.03, 0.1, 0.4])
    limits = []
    for a in range(beads):
        for b in range(a + 1, beads):
            if generator.random() > generator.choice([0.2, 0.5, 0.9]):
                continue
            distance = sum((p - q) ** 2 for p, q in zip(points[a], points[b])) ** 0.5
            distance *= 1.0 + generator.gauss(0, noise)
            lower = round(max(0.0, distance - generator.uniform(0, 3)), 3)
            upper = None if generator.random() < 0.1 else round(abs(distance) + generator.uniform(0.01, 3), 3)
            limits.append((a, b, lower, upper))
    return beads, limits


def expected(beads, limits):
    """Closed uppers and lowers, and by how much the worst given lower limit exceeds the uppers."""
    upper = numpy.full((beads, beads), numpy.inf)
    given = numpy.zeros((beads, beads))
    for a, b, low, high in limits:
        upper[a, b] = upper[b, a] = numpy.inf if high is None else high
        given[a, b] = given[b, a] = low
    numpy.fill_diagonal(upper, 0.0)
    upper = floyd_warshall(upper, directed=False)
    lower = numpy.array([[max(0.0, (given - upper[i][:, None] - upper[j][None, :]).max()) for j in range(beads)] for i in range(beads)])
    return upper, lower, (given - upper).max()


def run(*arguments):
    return subprocess.run([PROGRAM, *arguments], capture_output=True, timeout=120, check=False)


def problems_of(folder, beads, limits):
    """What is wrong with the program's answers for one set; empty when nothing is."""
    sheet, found = os.path.join(folder, 'set.sheet'), os.path.join(folder, 'found.json')
    with open(sheet, 'w', encoding='utf-8') as file:
        file.write('sheet 1\n' + ''.join(f'atom B{i} bead\n' for i in range(beads)))
        for number, (a, b, low, high) in enumerate(limits):
            file.write(f'limit B{a} B{b} {low} {"-" if high is None else high} as r{number}\n')
    upper, lower, worst = expected(beads, limits)
    if abs(worst - 0.001) < 1e-4:
        return []  # at the threshold either answer is right
    checked = run('check', sheet, '--json', found)
    if checked.returncode != (1 if worst > 0.001 else 0):
        return [f'status {checked.returncode} with a worst excess of {worst}: {checked.stderr.decode()}']
    if worst > 0.001:
        with open(found, encoding='utf-8') as file:
            return [wrong for proof in json.load(file)['contradictions'] for wrong in faults(proof, limits)]
    wrong = []
    for line in run('bounds', sheet).stdout.decode().splitlines()[1:]:
        a, b, low, high = line.split('\t')
        i, j = int(a[1:]), int(b[1:])
        high = numpy.inf if high == '-' else float(high)
        if not (high == upper[i, j] or abs(high - upper[i, j]) < ROUNDING) or abs(float(low) - lower[i, j]) > ROUNDING:
            wrong.append(f'{line}, expected {lower[i, j]} {upper[i, j]}')
    return wrong


def faults(proof, limits):
    """What keeps a chain from being a proof."""
    chain, wrong = proof['chain'], []
    for step, following in zip(chain, chain[1:] + chain[:1]):
        a, b, low, high = limits[int(step['id'][1:])]
        if {step['atom_1'], step['atom_2']} != {f'B{a}', f'B{b}'} or step['atom_2'] != following['atom_1']:
            wrong.append(f'the chain does not close: {step}')
        if abs(step['value'] - (low if step['bound'] == 'lower' else high)) > 1e-6:
            wrong.append(f'not the limit that was given: {step}')
    if [step['bound'] for step in chain] != ['lower'] + ['upper'] * (len(chain) - 1):
        wrong.append('not one lower limit and then uppers')
    excess = chain[0]['value'] - sum(step['value'] for step in chain[1:])
    if abs(excess - proof['excess']) > 1e-4 or excess < 0.001:
        wrong.append(f'excess {proof["excess"]}, by the steps {excess}')
    return wrong


def main():
    generator = random.Random(20240607)
    passed = failed = contradicted = 0
    with tempfile.TemporaryDirectory() as folder:
        for number in range(SETS):
            beads, limits = random_set(generator)
            if not limits:
                continue
            wrong = problems_of(folder, beads, limits)
            contradicted += expected(beads, limits)[2] > 0.001
            passed, failed = passed + (not wrong), failed + bool(wrong)
            if wrong:
                print(f'set {number}, {beads} beads:', *wrong[:5], sep='\n    ')
    if not 20 <= contradicted <= SETS - 20:
        failed += 1
        print(f'{contradicted} of {SETS} sets are contradicted: too few of one kind')
    print(f'{passed} passed, {failed} failed')
    return failed != 0


if __name__ == '__main__':
    sys.exit(main())
