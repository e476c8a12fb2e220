"""Smoothing against SciPy's Floyd-Warshall (scipy.sparse.csgraph) on the same upper limits, and the peak memory of a build.

Rows: what, figure asked, measured. The program `kernels` beside this script makes the limits and times the smoothing.
"""
import os
import random
import resource
import subprocess
import tempfile
import time

import numpy
from scipy.sparse.csgraph import floyd_warshall

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
ATOMS, THREADS = 2048, 2
ASKED = {'512': 25, '256': 15}


def row(what, asked, measured):
    print(f'{what:<62} {asked:<12} {measured}', flush=True)


def smoothing(folder):
    path = os.path.join(folder, 'uppers')
    out = subprocess.run([os.path.join(BUILD, 'bench', 'kernels'), path], check=True, capture_output=True, text=True).stdout
    given, closed = numpy.fromfile(path, dtype=numpy.float32).reshape(2, ATOMS, ATOMS).astype(numpy.float64)
    start = time.perf_counter()
    theirs = floyd_warshall(given, directed=False, overwrite=False)
    seconds = time.perf_counter() - start
    row("SciPy's Floyd-Warshall, n = 2048, upper limits alone, s", '-', f'{seconds:.2f}')
    row('largest difference of the closed upper limits, Å', '<= 1e-3', f'{abs(closed - theirs).max():.1e}')
    for line in out.splitlines():
        width, ours = line.split()
        row(f'smoothing both limits, two threads, {width}-bit vectors: faster by', f'>= {ASKED[width]}', f'{seconds / float(ours):.1f}')


def memory(folder):
    beads, generator = 4096, random.Random(5)
    sheet = os.path.join(folder, 'walk.sheet')
    with open(sheet, 'w', encoding='utf-8') as file:
        file.write('sheet 1\n' + ''.join(f'atom B{i} bead\n' for i in range(beads)))
        for i in range(1, beads):
            file.write(f'limit B{i - 1} B{i} 3.0 4.0\n')
            file.write(f'limit B{generator.randrange(i)} B{i} 3.0 {generator.randint(20, 60)}\n')
    done = subprocess.run([os.path.join(BUILD, 'trammel'), 'build', sheet, '-n', '2', '--trials', '2', '--threads', str(THREADS),
                           '-o', os.path.join(folder, 'models.cif')], check=False, capture_output=True)
    if done.returncode not in (0, 1):
        raise SystemExit(f'build: status {done.returncode}\n{done.stderr.decode()}')
    peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss * 1024
    asked = (1 + 2 * THREADS) * 4 * beads ** 2 + 100e6
    row(f'peak memory of a build, {beads} atoms, two threads, MB', f'<= {asked / 1e6:.0f}', f'{peak / 1e6:.0f}')


def main():
    with tempfile.TemporaryDirectory() as folder:
        smoothing(folder)
    with tempfile.TemporaryDirectory() as folder:
        memory(folder)


if __name__ == '__main__':
    main()
