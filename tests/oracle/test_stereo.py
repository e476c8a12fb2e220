#!/usr/bin/python3
"""Open stereo pairs: the assignment that the summary reports for each model, measured again from the written models.

Models are read by gemmi; distances are (sum r^-6)^(-1/6) over the pairs that a name means, written anew here. The pairs and their
names are the prochiral ones of Markley et al., Pure Appl. Chem. 70 (1998) 117, typed from memory.
"""
import json
import os
import re
import subprocess
import sys
import tempfile

import gemmi
import numpy as np

TRAMMEL = os.path.join(os.environ["TRAMMEL_BUILD"], "trammel")
VEILIN = os.path.join(os.path.dirname(__file__), "..", "..", "restraints", "veilin.nef")


def read(path):
    models = []
    for model in gemmi.read_structure(path):
        atoms = {}
        for chain in model:
            for residue in chain:
                for atom in residue:
                    atoms[(chain.name, str(residue.seqid.num), atom.name)] = np.array([atom.pos.x, atom.pos.y, atom.pos.z])
        models.append(atoms)
    return models


def rows(text):
    doc = gemmi.cif.read_string(text)
    for item in doc[0]:
        if item.frame is None:
            continue
        table = item.frame.find("_nef_distance_restraint.", ["restraint_id", "chain_code_1", "sequence_code_1", "atom_name_1",
                                                            "chain_code_2", "sequence_code_2", "atom_name_2", "lower_limit",
                                                            "upper_limit"])
        for row in table:
            yield (item.frame.name, row[0]), tuple(row[k] for k in (1, 2, 3)), \
                tuple(row[k] for k in (4, 5, 6)), row[7], row[8]


def matching(model, chain, number, name):
    pattern = re.compile(re.escape(name).replace("%", "[0-9]+").replace(r"\*", ".*") + "$")
    return [p for (c, n, a), p in model.items() if c == chain and n == number and pattern.match(a)]


def atoms_of(model, address, x_is_second):
    chain, number, name = address
    letter = re.search("[xy]", name)
    if letter:
        members = [matching(model, chain, number, name.replace(letter.group(), digit)) for digit in "123"]
        members = [atoms for atoms in members if atoms]
        assert len(members) == 2, address
        return members[(letter.group() == "y") != x_is_second[(chain, number, name[1])]]
    return matching(model, chain, number, name) or [model[(chain, number, {"H": "H1", "HN": "H"}.get(name, name))]]


def violation(model, restraint, x_is_second):
    total = 0.0
    for one, other in restraint["rows"]:
        for p in atoms_of(model, one, x_is_second):
            for q in atoms_of(model, other, x_is_second):
                d = np.sum((p - q) ** 2)
                if d > 0:
                    total += d ** -3
    r = total ** (-1 / 6)
    return max(r - restraint["upper"], restraint["lower"] - r, 0.0)


def main():
    text = open(VEILIN, encoding="utf-8").read()
    passed = failed = 0
    with tempfile.TemporaryDirectory() as folder:
        pdb, summary = (os.path.join(folder, name) for name in ("open.pdb", "open.json"))
        subprocess.run([TRAMMEL, "build", VEILIN, "-n", "4", "--trials", "8", "-o", pdb, "--summary", summary], check=False,
                       stdout=subprocess.DEVNULL)
        models, told = read(pdb), json.load(open(summary, encoding="utf-8"))
    restraints = {}
    for key, one, other, lower, upper in rows(text):
        number = lambda s, default: default if s in (".", "?") else float(s)
        item = restraints.setdefault(key, {"rows": [], "lower": number(lower, 0.0), "upper": number(upper, np.inf)})
        item["rows"].append((one, other))
    pairs = told["stereo_pairs"]
    print(f"{len(pairs)} open pairs, {len(restraints)} restraints, {len(models)} models")
    checks = [("some pairs are open", len(pairs) >= 5), ("four models were written", len(models) == 4)]
    for m, model in enumerate(models):
        x_is_second = {}
        for pair in pairs:
            chain, number, name = pair["first"][0].split(":")
            x_is_second[(chain, number, name[1])] = pair["x_is_second"][m]
        off = {key: violation(model, item, x_is_second) for key, item in restraints.items()}
        worst = told["models"][m]["distance"]["max"]
        checks.append((f"model {m + 1}: the worst violation is the one told", abs(max(off.values()) - worst) < 0.01))
        # No pair alone can change over and leave less error: squares, as near the limits of the error function.
        better = []
        for place in x_is_second:
            mine = [k for k, item in restraints.items() for row in item["rows"] for a in row
                    if (a[0], a[1], a[2][1:2]) == place and re.search("[xy]", a[2])]
            before = sum(off[k] ** 2 for k in set(mine))
            other = {**x_is_second, place: not x_is_second[place]}
            after = sum(violation(model, restraints[k], other) ** 2 for k in set(mine))
            if after < before - 0.02:
                better.append((place, before, after))
        checks.append((f"model {m + 1}: no pair would violate less the other way round {better}", not better))
    for name, good in checks:
        passed, failed = passed + good, failed + (not good)
        if not good:
            print("FAILED:", name)
    print(f"{passed} passed, {failed} failed")
    return failed > 0


sys.exit(main())
