"""Compares `handsfull reckon --json` with pandapower's line types and pint's units.

Usage: conductors.py PROGRAM. Installs both libraries by name into a temporary environment (pip's
ordinary configuration decides from where). Exit code 77: skipped, with the reason.

pandapower's standard line types give the resistance of real cables at 20 °C; those that state the
maximum of IEC 60228 must agree exactly, the others must not lie above it by more than 1 %.
"""
import json
import os
import subprocess
import sys
import tempfile
import venv

# Read in pandapower 3.5.6. Those equal to the maxima of IEC 60228, and those its maker states a
# little lower.
EQUAL = [
    ("NA2XS2Y 1x70 RM/25 12/20 kV", "aluminium", 70),
    ("NA2XS2Y 1x120 RM/25 12/20 kV", "aluminium", 120),
    ("NA2XS2Y 1x150 RM/25 12/20 kV", "aluminium", 150),
    ("N2XS(FL)2Y 1x120 RM/35 64/110 kV", "copper", 120),
]
BELOW = [
    ("NA2XS2Y 1x95 RM/25 12/20 kV", "aluminium", 95),
    ("NA2XS2Y 1x185 RM/25 12/20 kV", "aluminium", 185),
    ("NA2XS2Y 1x240 RM/25 12/20 kV", "aluminium", 240),
    ("N2XS(FL)2Y 1x185 RM/35 64/110 kV", "copper", 185),
    ("N2XS(FL)2Y 1x240 RM/35 64/110 kV", "copper", 240),
    ("N2XS(FL)2Y 1x300 RM/35 64/110 kV", "copper", 300),
]

ASK = r"""
import json, sys
import pandapower, pint
net = pandapower.create_empty_network()
types = pandapower.available_std_types(net, "line")
unit = pint.UnitRegistry()
out = {"pandapower": pandapower.__version__, "pint": pint.__version__}
out["lines"] = {
    name: {"r": float(types.loc[name].r_ohm_per_km), "alpha": float(types.loc[name].alpha)}
    for name in json.loads(sys.argv[1])
    if name in types.index
}
rate = 19.51 * unit("milliohm/meter")
out["r1r2"] = (rate * 30 * unit.meter).to("ohm").magnitude
out["megohm"] = (1.0 / sum(1.0 / (v * unit.megaohm) for v in (5, 20, 10, 20, 2))).to("megaohm").magnitude
out["fault"] = (230 * unit.volt / (0.15 * unit.ohm)).to("kiloampere").magnitude
out["drop"] = (20 * unit.ampere * 2 * 7.41 * 1.2 * unit("milliohm/meter") * 30 * unit.meter).to("volt").magnitude
print(json.dumps(out))
"""


def skip(why):
    print(why, file=sys.stderr)
    sys.exit(77)


def reckon(program, line):
    done = subprocess.run([program, "reckon", *line.split(), "--json"], capture_output=True, text=True)
    if done.returncode != 0:
        sys.exit(f"reckon {line}: {done.stderr}")
    return json.loads(done.stdout)


def libraries(folder):
    try:
        venv.create(folder, with_pip=True)
        python = os.path.join(folder, "bin", "python")
        subprocess.run(
            [python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check",
             "--retries", "1", "--timeout", "20", "pandapower", "pint"],
            check=True, capture_output=True, text=True, timeout=600,
        )
    except subprocess.CalledProcessError as error:
        skip(f"pip could not install pandapower and pint: {(error.stderr or str(error))[-300:]}")
    except Exception as error:  # noqa: BLE001 - whatever is missing, the comparison is skipped
        skip(f"no environment for pandapower and pint: {error}")
    return python


def main():
    program = sys.argv[1]
    wrong = []

    def compare(what, ours, theirs, within):
        good = abs(ours - theirs) <= within * abs(theirs)
        print(f"{'agrees' if good else 'DIFFERS'}: {what}: {ours:.6g} here, {theirs:.6g} there")
        if not good:
            wrong.append(what)

    with tempfile.TemporaryDirectory() as folder:
        python = libraries(folder)
        names = json.dumps([name for name, _, _ in EQUAL + BELOW])
        asked = subprocess.run([python, "-c", ASK, names], capture_output=True, text=True)
        if asked.returncode != 0:
            skip(f"the libraries do not answer: {asked.stderr[-300:]}")
        there = json.loads(asked.stdout)
    print(f"pandapower {there['pandapower']}, pint {there['pint']}")
    compared = 0
    for name, material, mm2 in EQUAL + BELOW:
        line = there["lines"].get(name)
        if line is None:
            print(f"not held there any more: {name}")
            continue
        compared += 1
        ours = reckon(program, f"conductor --mm2 {mm2} --material {material}")["value"]
        if (name, material, mm2) in EQUAL:
            compare(name, ours, line["r"], 1e-9)
        else:
            good = line["r"] <= ours * 1.01 and line["r"] >= ours * 0.92
            print(f"{'agrees' if good else 'DIFFERS'}: {name}: {line['r']} lies under the maximum {ours}")
            if not good:
                wrong.append(name)
        hot = reckon(
            program,
            f"temperature --ohm 1 --from-c 20 --to-c 70 --material {material} --rule exact",
        )["value"]
        compare(f"{material} at 70 °C, exact", hot, 1 + line["alpha"] * 50, 1e-9)
    if compared < 5:
        sys.exit("fewer than five cables left to compare: look at the names")
    compare("R1+R2", reckon(program, "r1r2 --line-mm2 2.5 --cpc-mm2 1.5 --length-m 30")["value"], there["r1r2"], 1e-9)
    compare("megohm in parallel", reckon(program, "insulation --parallel-megohm 5,20,10,20,2")["value"], there["megohm"], 1e-9)
    compare("fault current", reckon(program, "fault-current --z-ohm 0.15")["value"], there["fault"], 1e-9)
    compare("voltage drop", reckon(program, "drop --current-a 20 --length-m 30 --line-mm2 2.5")["value"], there["drop"], 1e-9)
    if wrong:
        sys.exit(f"{len(wrong)} figures differ: {wrong}")


main()
