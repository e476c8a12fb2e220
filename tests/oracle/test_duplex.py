"""The demo's DNA duplex, built and measured anew from the written mmCIF: a right-handed helix of Watson-Crick pairs.

Models are read by gemmi. Values to compare with: C1'-C1' of a Watson-Crick pair about 10.5 A, twist about 36 and rise about 3.4 A a
pair in the B form (Arnott & Hukins, Biochem. Biophys. Res. Commun. 47 (1972) 1504; from memory). Without the pull of stacking, limits
alone leave the rise some tenths of an A too long."""
import json
import os
import subprocess
import tempfile
import unittest

import gemmi
import numpy

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
DUPLEX = os.path.join(os.path.dirname(os.path.abspath(__file__)), '..', '..', 'restraints', 'harl-operator.sheet')
PAIRS = 10


def place(chain, number, name):
    for residue in chain:
        if residue.seqid.num == number:
            return numpy.array(residue.find_atom(name, '*').pos.tolist())
    raise KeyError((chain.name, number, name))


def helix(model):
    """Mean twist in degrees (positive: right-handed), mean rise, and the C1'-C1' distances."""
    one = [place(model['A'], i, "C1'") for i in range(1, PAIRS + 1)]
    other = [place(model['B'], 2 * PAIRS + 1 - i, "C1'") for i in range(1, PAIRS + 1)]
    across = [b - a for a, b in zip(one, other)]
    middle = [(a + b) / 2 for a, b in zip(one, other)]
    twists, rises = [], []
    for i in range(PAIRS - 1):
        axis = middle[min(i + 2, PAIRS - 1)] - middle[max(i - 1, 0)]
        axis = axis / numpy.linalg.norm(axis)
        u, v = (x - numpy.dot(x, axis) * axis for x in (across[i], across[i + 1]))
        twists.append(numpy.degrees(numpy.arctan2(numpy.dot(numpy.cross(u, v), axis), numpy.dot(u, v))))
        rises.append(numpy.dot(middle[i + 1] - middle[i], axis))
    return numpy.mean(twists), numpy.mean(rises), [numpy.linalg.norm(x) for x in across]


class Duplex(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        with tempfile.TemporaryDirectory() as folder:
            models, summary = os.path.join(folder, 'duplex.cif'), os.path.join(folder, 'duplex.json')
            subprocess.run([os.path.join(BUILD, 'trammel'), 'build', DUPLEX, '-n', '3', '--trials', '8', '--select', 'first', '-o', models,
                            '--summary', summary], check=True, capture_output=True, timeout=300)
            cls.document = gemmi.cif.read(models)
            cls.models = gemmi.read_structure(models)
            with open(summary, encoding='utf-8') as file:
                cls.summary = json.load(file)

    def test_most_trials_pass(self):
        self.assertEqual(len(self.models), 3)
        self.assertGreaterEqual(self.summary['passed'] / self.summary['trials'], 0.6)

    def test_it_is_a_right_handed_helix_of_pairs(self):
        for model in self.models:
            twist, rise, across = helix(model)
            print(f'twist {twist:.1f} deg, rise {rise:.2f} A, C1\'-C1\' {min(across):.2f} to {max(across):.2f} A')
            self.assertTrue(30 < twist < 44, twist)
            self.assertTrue(3.2 < rise < 4.3, rise)
            self.assertTrue(10.0 < min(across) and max(across) < 11.2)

    def test_mmcif_says_what_the_strands_are(self):
        types = set(self.document.sole_block().find_values('_entity_poly.type'))
        self.assertEqual({gemmi.cif.as_string(t) for t in types}, {'polydeoxyribonucleotide'})
        self.assertEqual({e.polymer_type for e in self.models.entities if e.entity_type == gemmi.EntityType.Polymer}, {gemmi.PolymerType.Dna})


if __name__ == '__main__':
    result = unittest.main(exit=False).result
    bad = len(result.failures) + len(result.errors)
    print(f'{result.testsRun - bad} passed, {bad} failed')
    raise SystemExit(bad > 0)
