#!/usr/bin/env python3
"""Run every check and end with one line, 'N passed, N failed', over all of them.

    check.py [STAGE ...]      the stages named, or the usual ones; run from the project's root (`make check` does)

Conventions, so that a new test is found without touching this file:
    tests/*.c                 Criterion programs; each of their tests counts
    tests/oracle/test_*       Python scripts and C or C++ programs that compare with something outside the project
    tests/cli/test_*.py       the program from outside
    tests/inject/test_*.c     programs linked so that allocations can be made to fail
    tests/fuzz/*.c            libFuzzer targets; first inputs in tests/fuzz/corpus/NAME/, restraints/, tests/cli/
Scripts and programs get TRAMMEL_BUILD, the folder of the build. They exit with 0 (passed), 77 (skipped) or anything else
(failed); one that holds several checks prints 'N passed, N failed, N skipped' as its last line.
"""
import concurrent.futures
import glob
import os
import re
import shlex
import shutil
import signal
import subprocess
import sys
import tempfile
import time

BUILD = os.environ.get('BUILD', 'build')
MAKE = shlex.split(os.environ.get('MAKE', 'make'))
PYTHON = os.environ.get('PYTHON', sys.executable)
CLANG = os.environ.get('CLANG', 'clang')
FUZZ_SECONDS = int(os.environ.get('FUZZ_SECONDS', '10'))
SOAK = os.environ.get('SOAK') == '1'
CORES = len(os.sched_getaffinity(0))
SANITIZERS = '-fsanitize=address,undefined -fno-sanitize-recover=undefined -fno-omit-frame-pointer'
SANITIZED = {'ASAN_OPTIONS': 'detect_leaks=1:allocator_may_return_null=1', 'UBSAN_OPTIONS': 'print_stacktrace=1'}
COUNT = re.compile(r'^(\d+) passed, (\d+) failed(?:, (\d+) skipped)?$')


class Tally:
    def __init__(self):
        self.passed = self.failed = self.skipped = 0

    def add(self, name, passed, failed, skipped=0, output=''):
        """Count one program's checks; what failed is shown at once, with the end of its output."""
        self.passed += passed
        self.failed += failed
        self.skipped += skipped
        if failed:
            print(f'--- FAILED: {name}', *output.splitlines()[-60:], '---', sep='\n', flush=True)
        elif skipped:
            print(f'    skipped: {name}: {output.strip().splitlines()[-1] if output.strip() else "no reason given"}', flush=True)


tally = Tally()


def run(command, env=None, timeout=600):
    """Exit status and all output; a command that runs too long is ended with its children."""
    process = subprocess.Popen(command, stdin=subprocess.DEVNULL, stdout=subprocess.PIPE, stderr=subprocess.STDOUT,
                               env={**os.environ, **(env or {})}, start_new_session=True)
    try:
        output = process.communicate(timeout=timeout)[0].decode(errors='replace')
        return process.returncode, output
    except subprocess.TimeoutExpired:
        os.killpg(process.pid, signal.SIGKILL)
        output = process.communicate()[0].decode(errors='replace')
        return -1, f'{output}\nstill running after {timeout} s'


def check(name, command, env=None, timeout=600):
    """Run one thing that passes or fails as a whole."""
    status, output = run(command, env, timeout)
    tally.add(name, status == 0, status != 0, output=output)
    return status == 0


def make(*arguments, timeout=900):
    return MAKE + ['--no-print-directory', '-s', f'-j{CORES}', *arguments]


def count_script(name, status, output):
    """A script's own count if its last line is one, else its exit status."""
    lines = output.strip().splitlines()
    counted = COUNT.match(lines[-1]) if lines else None
    if counted:
        passed, failed, skipped = (int(part or 0) for part in counted.groups())
        lied = failed == 0 and status != 0
        tally.add(name, passed, failed + lied, skipped, output)
    elif status == 77:
        tally.add(name, 0, 0, 1, output)
    else:
        tally.add(name, status == 0, status != 0, output=output)


def programs(pattern, build, folder):
    """Built programs, by the sources that are there now."""
    return [os.path.join(build, folder, os.path.splitext(os.path.basename(path))[0]) for path in sorted(glob.glob(pattern))]


def run_scripts(commands, env, workers):
    with concurrent.futures.ThreadPoolExecutor(workers) as pool:
        for command, (status, output) in zip(commands, pool.map(lambda c: run(c, env), commands)):
            count_script(command[-1], status, output)


# ---- stages ----

def stage_build():
    """Everything compiles without a warning."""
    return check('make', make('all', 'shared', 'tests', 'oracles', 'injects', 'benches', 'OPT=-O3 -Werror', f'BUILD={BUILD}'),
                 timeout=900)


def unit_tests(build, env):
    synthesis = re.compile(r'Tested: .*?(\d+).*? \| Passing: .*?(\d+).*? \| Failing: .*?(\d+).*? \| Crashing: .*?(\d+)')
    for program in programs('tests/*.c', build, 'tests'):
        status, output = run([program], env)
        counted = synthesis.search(re.sub(r'\x1b\[[0-9;]*m', '', output))
        if counted is None or int(counted[1]) == 0:
            tally.add(program, 0, 1, output=output)
            continue
        tested, passing = int(counted[1]), int(counted[2])
        failing = max(tested - passing, 1 if status else 0)
        leaked = 'ERROR: LeakSanitizer' in output  # told by a test's own process, which Criterion calls passed all the same
        tally.add(program, passing, max(failing, int(leaked)), output=output)


def stage_unit():
    """Unit tests."""
    unit_tests(BUILD, {'TRAMMEL_BUILD': BUILD})


def stage_oracle():
    """Comparisons with outside references."""
    commands = [[PYTHON, path] for path in sorted(glob.glob('tests/oracle/test_*.py'))]
    commands += [[path] for path in programs('tests/oracle/test_*.c', BUILD, 'oracle')]
    commands += [[path] for path in programs('tests/oracle/test_*.cpp', BUILD, 'oracle')]
    run_scripts(commands, {'TRAMMEL_BUILD': BUILD}, CORES)


def stage_cli():
    """The program from outside."""
    run_scripts([[PYTHON, path] for path in sorted(glob.glob('tests/cli/test_*.py'))], {'TRAMMEL_BUILD': BUILD}, 1)


def stage_api():
    """The example of the public interface, against the installed library; what is installed, and that it goes away."""
    with tempfile.TemporaryDirectory() as root:
        place = ['PREFIX=/opt/trammel', f'DESTDIR={root}', f'BUILD={BUILD}']
        if not check('make install', make('install', *place)):
            return
        prefix = f'{root}/opt/trammel'
        env = {'PKG_CONFIG_PATH': f'{prefix}/lib/pkgconfig', 'PKG_CONFIG_SYSROOT_DIR': root, 'LD_LIBRARY_PATH': f'{prefix}/lib'}
        status, flags = run(['pkg-config', '--cflags', '--libs', 'trammel'], env)
        tally.add('pkg-config', status == 0, status != 0, output=flags)
        strict = ['-std=c11', '-Wall', '-Wextra', '-Wpedantic', '-Werror']
        if check('example: compile', ['cc', *strict, 'tests/example/example.c', '-o', f'{root}/example', *flags.split(), '-lm']):
            check('example: run', [f'{root}/example', root], env)
        header = f'{prefix}/include/trammel/trammel.h'
        check('trammel.h is C++, too', ['g++', '-x', 'c++', '-std=c++11', '-Wall', '-Wextra', '-Werror', '-fsyntax-only', header])
        status, symbols = run(['nm', '-D', '--defined-only', f'{prefix}/lib/libtrammel.so'])
        shown = {line.split()[-1] for line in symbols.splitlines()}
        code = re.sub(r'/\*.*?\*/|typedef void [^;]*;', '', open(header, encoding='utf-8').read(), flags=re.S)
        declared = set(re.findall(r'\b(tml_[a-z0-9_]+)\(', code))
        tally.add('the shared library shows what trammel.h declares', shown == declared, shown != declared,
                  output=f'differ: {sorted(shown ^ declared)}')
        check('trammel --version, installed', [f'{prefix}/bin/trammel', '--version'], env)
        check('make uninstall', make('uninstall', *place))
        left = [name for _, _, names in os.walk(prefix) for name in names]
        tally.add('uninstall leaves no file', not left, bool(left), output=str(left))


def stage_sanitize():
    """Unit and command tests under the address, leak and undefined-behaviour sanitizers."""
    build = f'{BUILD}/sanitize'
    if check('make, sanitized', make('all', 'tests', f'BUILD={build}', f'SAN={SANITIZERS}', 'OPT=-O1'), timeout=900):
        env = {'TRAMMEL_BUILD': build, 'TRAMMEL_SANITIZED': '1', **SANITIZED}
        unit_tests(build, env)
        run_scripts([[PYTHON, path] for path in sorted(glob.glob('tests/cli/test_*.py'))], env, 1)


def fuzz_one(program):
    name = os.path.basename(program)
    with tempfile.TemporaryDirectory() as scratch:
        corpus = [path for path in (f'tests/fuzz/corpus/{name}', 'restraints', 'tests/cli') if os.path.isdir(path)]
        return run([program, f'-max_total_time={FUZZ_SECONDS}', '-timeout=20', '-rss_limit_mb=3000', '-max_len=20000',
                    f'-artifact_prefix={scratch}/', '-print_final_stats=1', scratch, *corpus],
                   {**SANITIZED, 'TRAMMEL_BUILD': BUILD}, FUZZ_SECONDS + 300)


def stage_fuzz():
    """Hostile inputs, made by a fuzzer; with clang, whose build must be free of warnings, too."""
    build = f'{BUILD}/fuzzing'
    sanitizers = SANITIZERS.replace('=address', '=fuzzer-no-link,address')
    if not check('make, with clang', make('all', 'fuzzes', f'BUILD={build}', f'CC={CLANG}', f'SAN={sanitizers}',
                                          'OPT=-O1 -Werror'), timeout=900):
        return
    targets = programs('tests/fuzz/*.c', build, 'fuzz')
    with concurrent.futures.ThreadPoolExecutor(CORES) as pool:
        for target, (status, output) in zip(targets, pool.map(fuzz_one, targets)):
            tally.add(target, status == 0, status != 0, output=output)


def stage_inject():
    """The k-th allocation fails, for many k: no crash, no leak, the right status."""
    run_scripts([[path] for path in programs('tests/inject/test_*.c', BUILD, 'inject')],
                {'TRAMMEL_BUILD': BUILD, **({'SOAK': '1'} if SOAK else {})}, 1)


def stage_valgrind():
    """A small job under valgrind."""
    with tempfile.TemporaryDirectory() as scratch:
        memory = ['valgrind', '-q', '--error-exitcode=99', '--leak-check=full', '--errors-for-leak-kinds=definite']
        for command in (['check'], ['bounds'], ['build', '-n', '1', '--trials', '1', '-o', f'{scratch}/models.pdb']):
            status, output = run([*memory, f'{BUILD}/trammel', *command, '--threads', '1', 'tests/cli/five-ring.sheet'],
                                 {'OPENBLAS_NUM_THREADS': '1'})
            tally.add(f'valgrind trammel {command[0]}', status in (0, 1), status not in (0, 1), output=output)


def tidy(path):
    return run(['clang-tidy', '--quiet', '--warnings-as-errors=*', path, '--', '-std=c17', '-D_POSIX_C_SOURCE=200809L',
                '-fopenmp', '-Iinclude', '-Isrc'])


def stage_lint():
    """Static analysis, by the rules in .clang-tidy."""
    sources = sorted(glob.glob('src/*/*.c'))
    with concurrent.futures.ThreadPoolExecutor(CORES) as pool:
        for path, (status, output) in zip(sources, pool.map(tidy, sources)):
            findings = '\n'.join(line for line in output.splitlines() if re.search(r'(error|warning): ', line))
            tally.add(f'clang-tidy {path}', status == 0, status != 0, output=findings)


def stage_soak():
    """Many seeds of a small job under the sanitizers."""
    with tempfile.TemporaryDirectory() as scratch:
        for seed in range(200):
            command = [f'{BUILD}/sanitize/trammel', 'build', '-n', '3', '--seed', str(seed), '-o', f'{scratch}/models.pdb',
                       'tests/cli/five-ring.sheet']
            status, output = run(command, SANITIZED)
            tally.add(f'seed {seed}', status in (0, 1), status not in (0, 1), output=output)


USUAL = ['build', 'unit', 'oracle', 'cli', 'api', 'inject', 'valgrind', 'sanitize', 'fuzz', 'lint']


def main():
    stages = sys.argv[1:] or USUAL
    if 'build' not in stages and {'inject'} & set(stages):
        stages.insert(0, 'build')
    for name in stages:
        stage = globals()[f'stage_{name}']
        before, start = (tally.passed, tally.failed, tally.skipped), time.time()
        print(f'== {name}: {stage.__doc__}', flush=True)
        going_on = stage()
        counts = [now - then for now, then in zip((tally.passed, tally.failed, tally.skipped), before)]
        print(f'   {name}: {counts[0]} good, {counts[1]} bad, {counts[2]} left out, {time.time() - start:.0f} s', flush=True)
        if name == 'build' and not going_on:
            break
    skipped = f', {tally.skipped} skipped' if tally.skipped else ''
    print(f'{tally.passed} passed, {tally.failed} failed{skipped}')
    return 1 if tally.failed or not tally.passed else 0


if __name__ == '__main__':
    sys.exit(main())
