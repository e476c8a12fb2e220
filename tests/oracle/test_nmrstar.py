"""NMR-STAR 3 restraints against NEF ones: the demo set, read here by gemmi and written anew as NMR-STAR in three dialects (general
distance constraints with one row for each pair of atoms; the same by the author's numbers; trees of version 3.0), must give the same
restraints. Tags: the NMR-STAR dictionary of the Biological Magnetic Resonance Data Bank, from memory. Wildcards are spelled out by the
rules of NEF 1.1 (% stands for digits); restraints that leave x and y open have no counterpart in NMR-STAR and are left out of both."""
import collections
import os
import re
import subprocess
import tempfile
import unittest

import gemmi

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
NEF = os.path.join(os.path.dirname(os.path.abspath(__file__)), '..', '..', 'restraints', 'veilin.nef')
OFFSET = 40  # of the author's numbers


def dump(text, suffix):
    with tempfile.NamedTemporaryFile('w', suffix=suffix) as file:
        file.write(text)
        file.flush()
        done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_restraints'), file.name], capture_output=True, text=True, timeout=120,
                              check=True)
    return [line.split('\t') for line in done.stdout.splitlines()]


def restraints_of(lines):
    """Of a dump: a multiset of (limits, pairs of atoms by name) and one of (atoms of a torsion, interval)."""
    atoms, distances, torsions = {}, [], []
    for line in lines:
        if line[0] == 'atom':
            atoms[line[1]] = tuple(line[2:4]) + (line[5],)
        elif line[0] == 'distance':
            distances.append([(round(float(line[3]), 4), round(float(line[4]), 4)), set()])
        elif line[0] == 'alternative':
            for a in line[2].split(','):
                for b in line[3].split(','):
                    if a != b:
                        distances[-1][1].add(tuple(sorted((atoms[a], atoms[b]))))
        elif line[0] == 'interval':
            torsions.append((tuple(atoms[k] for k in line[1:5]), round(float(line[5]), 2), round(float(line[6]), 2)))
    return collections.Counter((limits, frozenset(pairs)) for limits, pairs in distances), collections.Counter(torsions)


class Demo:
    def __init__(self):
        block = gemmi.cif.read(NEF)[0]
        self.sequence, self.distances, self.torsions, self.open = [], collections.OrderedDict(), [], 0
        names = [f'{name}_{k}' for k in '12' for name in ('chain_code', 'sequence_code', 'residue_name', 'atom_name')]
        for item in block:
            frame = item.frame
            if frame is None:
                continue
            for row in frame.find('_nef_sequence.', ['chain_code', 'sequence_code', 'residue_name']):
                self.sequence.append(tuple(row))
            for row in frame.find('_nef_distance_restraint.', ['restraint_id'] + names + ['lower_limit', 'upper_limit']):
                self.distances.setdefault((frame.name, row[0]), []).append([row[k] for k in range(1, 11)])
            names4 = [f'{name}_{k}' for k in '1234' for name in ('chain_code', 'sequence_code', 'residue_name', 'atom_name')]
            for row in frame.find('_nef_dihedral_restraint.', names4 + ['lower_limit', 'upper_limit']):
                self.torsions.append([row[k] for k in range(18)])
        for key in [k for k, rows in self.distances.items() if any(re.search('[xy]', r[3] + r[7]) for r in rows)]:
            del self.distances[key]
            self.open += 1


def spell_out(atoms, chain, number, name):
    pattern = re.compile(re.escape(name).replace('%', '[0-9]+').replace(r'\*', '.*') + '$')
    found = [a for c, n, a in atoms if (c, n) == (chain, number) and pattern.match(a)]
    return found or [name]


def loop(category, tags, rows):
    lines = ['loop_'] + [f'_{category}.{tag}' for tag in tags]
    lines += [' '.join(f"'{v}'" if '"' in str(v) or "'" not in str(v) and ' ' in str(v) else f'"{v}"' if "'" in str(v) else str(v) for v in row)
              for row in rows]
    return '\n'.join(lines) + '\nstop_\n'


def assembly(demo):
    chains = list(collections.OrderedDict.fromkeys(c for c, _, _ in demo.sequence))
    text = 'data_demo\nsave_assembly\n' + loop('Entity_assembly', ['ID', 'Entity_ID', 'Asym_ID'],
                                               [(k + 1, k + 1, c) for k, c in enumerate(chains)]) + 'save_\n'
    for k, chain in enumerate(chains):
        rows = [(n, int(n) + OFFSET, r) for c, n, r in demo.sequence if c == chain]
        text += f'save_entity_{k + 1}\n_Entity.ID {k + 1}\n_Entity.Type polymer\n' + loop('Entity_comp_index', ['ID', 'Auth_seq_ID', 'Comp_ID'],
                                                                                       rows) + 'save_\n'
    return text, {c: k + 1 for k, c in enumerate(chains)}


def torsions(demo, ids):
    tags = ['ID'] + [f'{t}_{k}' for k in '1234' for t in ('Entity_assembly_ID', 'Comp_index_ID', 'Comp_ID', 'Atom_ID')]
    rows = []
    for i, row in enumerate(demo.torsions):
        rows.append([i + 1] + [v for k in range(4) for v in (ids[row[4 * k]], row[4 * k + 1], row[4 * k + 2], row[4 * k + 3])] + row[16:])
    return 'save_torsions\n' + loop('Torsion_angle_constraint', tags + ['Angle_lower_bound_val', 'Angle_upper_bound_val'], rows) + 'save_\n'


def general(demo, atoms, by_author):
    text, ids = assembly(demo)
    names = ('Auth_asym_ID', 'Auth_seq_ID', 'Auth_atom_ID') if by_author else ('Entity_assembly_ID', 'Comp_index_ID', 'Atom_ID')
    rows = []
    for number, alternatives in enumerate(demo.distances.values(), 1):
        pairs = [(r, a, b) for r in alternatives for a in spell_out(atoms, r[0], r[1], r[3]) for b in spell_out(atoms, r[4], r[5], r[7])
                 if (r[0], r[1], a) != (r[4], r[5], b)]
        for r, a, b in pairs:
            one = (r[0], int(r[1]) + OFFSET, a) if by_author else (ids[r[0]], r[1], a)
            two = (r[4], int(r[5]) + OFFSET, b) if by_author else (ids[r[4]], r[5], b)
            rows.append([number, 'OR' if len(pairs) > 1 else '.', *one, *two, r[8], r[9]])
    tags = ['ID', 'Member_logic_code'] + [f'{t}_{k}' for k in '12' for t in names] + ['Distance_lower_bound_val', 'Distance_upper_bound_val']
    return text + 'save_distances\n' + loop('Gen_dist_constraint', tags, rows) + 'save_\n' + torsions(demo, ids)


def trees(demo, atoms):
    text, ids = assembly(demo)
    nodes, members, values = [], [], []
    for number, rows in enumerate(demo.distances.values(), 1):
        first = 1 if len(rows) == 1 else 2
        if len(rows) > 1:
            nodes.append((number, 1, 2, '.', 'OR'))
        for k, r in enumerate(rows):
            node = first + k
            nodes.append((number, node, '.', node + 1 if k + 1 < len(rows) else '.', '.'))
            for side, (chain, n, name) in enumerate(((r[0], r[1], r[3]), (r[4], r[5], r[7])), 1):
                members += [(number, node, side, ids[chain], n, a) for a in spell_out(atoms, chain, n, name)]
        values.append((number, 1, rows[0][8], rows[0][9]))
    text += 'save_distances\n'
    text += loop('Dist_constraint_tree', ['Constraint_ID', 'Node_ID', 'Down_node_ID', 'Right_node_ID', 'Logic_operation'], nodes)
    text += loop('Dist_constraint', ['Tree_node_member_constraint_ID', 'Tree_node_member_node_ID', 'Constraint_tree_node_member_ID',
                                     'Entity_assembly_ID', 'Comp_index_ID', 'Atom_ID'], members)
    text += loop('Dist_constraint_value', ['Constraint_ID', 'Tree_node_ID', 'Distance_lower_bound_val', 'Distance_upper_bound_val'], values)
    return text + 'save_\n' + torsions(demo, ids)


class SameProblem(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.demo = Demo()
        with open(NEF, encoding='utf-8') as file:
            lines = dump(file.read(), '.nef')
        cls.atoms = [(line[2], line[3], line[5]) for line in lines if line[0] == 'atom']
        distances, cls.torsions = restraints_of(lines)
        cls.distances = distances

    def check(self, text):
        distances, torsions = restraints_of(dump(text, '.str'))
        self.assertGreater(sum(distances.values()), 300)
        self.assertEqual(sum(distances.values()), len(self.demo.distances))
        self.assertFalse(distances - self.distances)
        self.assertEqual(sum((self.distances - distances).values()), self.demo.open)
        self.assertEqual(torsions, self.torsions)

    def test_general_distance_constraints(self):
        self.check(general(self.demo, self.atoms, False))

    def test_the_authors_numbers(self):
        self.check(general(self.demo, self.atoms, True))

    def test_trees_of_version_3_0(self):
        self.check(trees(self.demo, self.atoms))


if __name__ == '__main__':
    program = unittest.main(exit=False, verbosity=1)
    result = program.result
    bad = len(result.failures) + len(result.errors)
    print(f'{result.testsRun - bad} passed, {bad} failed')
    raise SystemExit(bad > 0)
