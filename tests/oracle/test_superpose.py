"""Superposition against SciPy's Rotation.align_vectors (scipy.spatial.transform) and NumPy's singular values."""
import os
import subprocess
import sys

import numpy
from scipy.spatial.transform import Rotation

PROGRAM = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'superpose')


def random_sets(generator):
    """Pairs of point sets: noisy copies of each other, strangers, mirror images, flat ones; of 3 to 200 points."""
    for number in range(400):
        count = int(generator.integers(3, 200))
        moving = generator.normal(size=(count, 3)) * generator.choice([0.1, 10, 1000], size=3 if number % 3 == 0 else 1)
        kind = number % 4
        if kind == 1:
            fixed = generator.normal(size=(count, 3)) * 10
        else:
            fixed = Rotation.random(random_state=number).apply(moving) + generator.normal(size=3) * 100
            fixed += generator.normal(size=fixed.shape) * generator.choice([0.001, 1])
        if kind == 2:
            fixed[:, 0] *= -1
        if kind == 3:
            moving[:, 2] = 0
        yield moving, fixed


def main():
    sets = list(random_sets(numpy.random.default_rng(11)))
    text = ''.join(f'{len(moving)}\n' + '\n'.join(' '.join(map(repr, map(float, point))) for point in (*moving, *fixed)) + '\n'
                   for moving, fixed in sets)
    lines = subprocess.run([PROGRAM], input=text, check=True, capture_output=True, text=True).stdout.splitlines()
    passed, failed = 0, abs(len(lines) - len(sets))
    for (moving, fixed), line in zip(sets, lines):
        told, *numbers = map(float, line.split())
        rotation, start, end = numpy.reshape(numbers[:9], (3, 3)), numbers[9:12], numbers[12:]
        a, b = moving - moving.mean(axis=0), fixed - fixed.mean(axis=0)
        theirs = Rotation.align_vectors(b, a)[1] / len(a) ** 0.5
        moved = (moving - start) @ rotation.T + end
        ours = (((moved - fixed) ** 2).sum() / len(a)) ** 0.5
        scale = max(abs(a).max(), abs(b).max())
        good = abs(ours - theirs) < 1e-7 * scale and abs(told - ours) < 1e-6 * scale
        good = good and abs(numpy.linalg.det(rotation) - 1) < 1e-10 and abs(rotation @ rotation.T - numpy.eye(3)).max() < 1e-10
        passed, failed = passed + good, failed + (not good)
        if not good:
            print(f'{len(a)} points: told {told}, measured {ours}, SciPy {theirs}')
    print(f'{passed} passed, {failed} failed')
    return failed != 0


if __name__ == '__main__':
    sys.exit(main())
