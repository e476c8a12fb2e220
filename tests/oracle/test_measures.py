"""What `build` tells of its models against the written models measured by gemmi and NumPy.

Ideal bonds, angles and planes come from our own tables (dump_molecule), radii from Bondi, J. Phys. Chem. 68 (1964) 441, and for H
from Rowland & Taylor, J. Phys. Chem. 100 (1996) 7384 (typed from memory); every measure is computed anew. Coordinates have three
decimals, so a count may differ where a pair stands that near a threshold.
"""
import json
import math
import os
import subprocess
import sys
import tempfile

import gemmi
import numpy

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
RESIDUES = 'ALA TRP SER PRO VAL LYS GLY PHE THR MET ASP CYS ILE'.split()
LIMITS = [('A:1:HB%', [(1, f'HB{i}') for i in (1, 2, 3)], 'A:13:HD1%', [(13, f'HD1{i}') for i in (1, 2, 3)], 1.8, 2.2),
          ('A:2:HA', [(2, 'HA')], 'A:9:HA', [(9, 'HA')], 2.0, 3.0),
          ('A:3:CA', [(3, 'CA')], 'A:7:CA', [(7, 'CA')], 12.8, 14.0),
          ('A:4:CA', [(4, 'CA')], 'A:12:CA', [(12, 'CA')], 3.5, 4.5)]
DIHEDRALS = [(5, -70, -50), (6, 40, 80), (8, 170, -170)]  # phi, degrees
RADII = {'C': 1.70, 'N': 1.55, 'O': 1.52, 'S': 1.80, 'H': 1.10}
POLAR = {'N', 'O', 'S'}
ROUNDING = 0.002


def angle(a, b, c):
    u, v = a - b, c - b
    return math.degrees(math.acos(max(-1, min(1, u @ v / numpy.linalg.norm(u) / numpy.linalg.norm(v)))))


def dihedral(*points):
    return math.degrees(gemmi.calculate_dihedral(*(gemmi.Position(*p) for p in points)))


def outside(value, low, high):
    """Degrees by which an angle is outside the interval that runs upwards from low to high."""
    into = (value - low) % 360
    width = (high - low) % 360
    return 0 if into <= width else min(into - width, 360 - into)


class Molecule:
    def __init__(self):
        self.terms = {}
        done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_molecule'), *RESIDUES], check=True, capture_output=True, text=True)
        for line in done.stdout.splitlines():
            key, *fields = line.split('\t')
            self.terms.setdefault(key, []).append(fields)
        self.names = [(int(f[1]), f[3]) for f in self.terms['atom']]
        self.elements = [f[4] for f in self.terms['atom']]
        self.index = {name: i for i, name in enumerate(self.names)}
        n = len(self.names)
        bonded = numpy.eye(n, dtype=int)
        for a, b, _ in self.terms['bond']:
            bonded[int(a), int(b)] = bonded[int(b), int(a)] = 1
        self.bonded = bonded
        self.near = numpy.linalg.matrix_power(bonded, 3) > 0


def measure(m, xyz):
    """The figures of one model, by their names in the summary; counts as (least, most)."""
    bonds = [numpy.linalg.norm(xyz[int(a)] - xyz[int(b)]) - float(length) for a, b, length in m.terms['bond']]
    angles = [angle(xyz[int(a)], xyz[int(b)], xyz[int(c)]) - float(ideal) for a, b, c, ideal in m.terms['angle']]
    planes = []
    for _, _, *atoms in m.terms['plane']:
        points = xyz[[int(i) for i in atoms[::3]]]
        if len(points) > 3:
            planes.append(numpy.linalg.svd(points - points.mean(axis=0))[1][2] / len(points) ** 0.5)
    omegas = [(abs(dihedral(*xyz[[int(p[i]) for i in (0, 1, 3, 4)]])), RESIDUES[m.names[int(p[4])][0] - 1], p[5] == '1') for p in m.terms['peptide']]
    usual = []
    for r in range(2, len(RESIDUES)):
        if RESIDUES[r - 1] == 'GLY':
            continue
        c0, n, ca, c, n1 = (xyz[m.index[key]] for key in ((r - 1, 'C'), (r, 'N'), (r, 'CA'), (r, 'C'), (r + 1, 'N')))
        phi, psi = dihedral(c0, n, ca, c), dihedral(n, ca, c, n1)
        usual.append((-180 <= phi <= -35 and (psi >= 90 or psi <= -160)) or (-170 <= phi <= -35 and -85 <= psi < 90) or
                     (35 <= phi <= 90 and 0 <= psi <= 95))
    wrong = 0
    for c, a1, a2, a3, _, sign, fixed in m.terms['centre']:
        u, v, w = (xyz[int(i)] - xyz[int(c)] for i in (a1, a2, a3))
        wrong += fixed == '1' and u @ numpy.cross(v, w) * int(sign) <= 0
    return {'bond_rms': numpy.sqrt(numpy.mean(numpy.square(bonds))), 'bond_max': abs(numpy.array(bonds)).max(),
            'angle_rms': numpy.sqrt(numpy.mean(numpy.square(angles))), 'plane_max': max(planes),
            'omega_off': sum((omega if cis else 180 - omega) > 30 for omega, _, cis in omegas),
            'cis_undeclared': sum(omega < 30 and not cis and residue != 'PRO' for omega, residue, cis in omegas),
            'wrong_handed': wrong, 'backbone_usual': sum(usual) / len(usual),
            'overlaps': (overlaps(m, xyz, -ROUNDING), overlaps(m, xyz, ROUNDING))}


def overlaps(m, xyz, slack):
    count = 0
    polar_h = [e == 'H' and any(m.elements[j] in POLAR for j in numpy.flatnonzero(m.bonded[i]) if j != i) for i, e in enumerate(m.elements)]
    for i, one in enumerate(m.elements):
        for j in range(i):
            other = m.elements[j]
            polar = (one in POLAR and (other in POLAR or polar_h[j])) or (other in POLAR and polar_h[i])
            reach = RADII[one] + RADII[other] - (1.0 if polar else 0.6) + slack
            count += not m.near[i, j] and numpy.linalg.norm(xyz[i] - xyz[j]) < reach
    return count


def violations(m, xyz):
    off = []
    for _, ones, _, others, low, high in LIMITS:
        total = sum(numpy.linalg.norm(xyz[m.index[a]] - xyz[m.index[b]]) ** -6 for a in ones for b in others) ** (-1 / 6)
        off.append(max(low - total, total - high, 0))
    turns = [outside(dihedral(*(xyz[m.index[key]] for key in ((r - 1, 'C'), (r, 'N'), (r, 'CA'), (r, 'C')))), low, high) for r, low, high in DIHEDRALS]
    return numpy.array(off), numpy.array(turns)


def compare(m, told, xyz):
    """What differs between a model's figures and the same measured here."""
    mine, wrong = measure(m, xyz), []
    for name, value in mine.items():
        theirs = told['geometry'][name]
        good = value[0] <= theirs <= value[1] if isinstance(value, tuple) else abs(theirs - value) <= (0.1 if name == 'angle_rms' else ROUNDING)
        wrong += [] if good else [f'{name}: told {theirs}, measured {value}']
    off, turns = violations(m, xyz)
    for name, value in (('max', off.max()), ('rms', numpy.sqrt(numpy.mean(off ** 2)))):
        if abs(told['distance'][name] - value) > ROUNDING:
            wrong.append(f'distance {name}: told {told["distance"][name]}, measured {value}')
    if abs(told['dihedral']['max'] - turns.max()) > 0.2:
        wrong.append(f'dihedral max: told {told["dihedral"]["max"]}, measured {turns.max()}')
    for kind, values, slack in (('distance', off, ROUNDING), ('dihedral', turns, 0.2)):
        for row in told[kind]['above']:
            if not (values > row['by'] + slack).sum() <= row['count'] <= (values > row['by'] - slack).sum():
                wrong.append(f'{kind} over {row["by"]}: told {row["count"]}, measured {values}')
    return wrong


def main():
    m, passed, failed, seen = Molecule(), 0, 0, {'over': 0, 'overlaps': 0, 'omega': 0}
    with tempfile.TemporaryDirectory() as folder:
        sheet, models, summary = (os.path.join(folder, name) for name in ('limits.sheet', 'models.cif', 'summary.json'))
        with open(sheet, 'w', encoding='utf-8') as file:
            file.write(f'sheet 1\nsequence A 1 {" ".join(RESIDUES)}\n')
            file.write(''.join(f'limit {one} {other} {low} {high}\n' for one, _, other, _, low, high in LIMITS))
            file.write(''.join(f'dihedral A:{r - 1}:C A:{r}:N A:{r}:CA A:{r}:C {low} {high}\n' for r, low, high in DIHEDRALS))
        subprocess.run([os.path.join(BUILD, 'trammel'), 'build', sheet, '-n', '6', '--trials', '6', '--effort', '0.03', '-o', models,
                        '--summary', summary], check=False, capture_output=True, timeout=120)
        with open(summary, encoding='utf-8') as file:
            told = json.load(file)['models']
        structure = gemmi.read_structure(models)
    for row, model in zip(told, structure):
        places = {(residue.seqid.num, atom.name): atom.pos.tolist() for residue in model[0] for atom in residue}
        wrong = compare(m, row, numpy.array([places[name] for name in m.names]))
        passed, failed = passed + (not wrong), failed + bool(wrong)
        seen['over'] += row['distance']['above'][0]['count']
        seen['overlaps'] += row['geometry']['overlaps']
        if wrong:
            print(f'model {row["model"]}:', *wrong, sep='\n    ')
    if len(told) != 6 or len(structure) != 6 or not seen['over'] or not seen['overlaps']:
        failed += 1
        print(f'{len(told)} models told, {len(structure)} written, {seen}: nothing to measure')
    print(f'{passed} passed, {failed} failed')
    return failed != 0


if __name__ == '__main__':
    sys.exit(main())
