#!/usr/bin/python3
"""Solves a network file anew, with 40 digits, and holds idlewire's answers against it.

    resolve_network.py NETWORK.json [FINDINGS.json]

NETWORK is what `idlewire network MODEL --json` writes, FINDINGS what `idlewire predict MODEL --json`
writes. Needs Debian's python3-mpmath, python3-numpy and python3-scipy, and nothing of idlewire.

The system is assembled in mpmath with 40 digits, its residuals are summed exactly, as integers in
units of 2^-400; a sparse LU in double precision is only the inner solver of an iterative refinement. So that the inner solver sees the 1e-9 S that tie a
floating conductor to the world beside the 1e3 S along it, each galvanic island has one base potential
and every other node of the island counts from it: series admittances then cancel out of the base's
row by construction. Ends with 0 if everything agrees, 1 if something does not, 2 on a bad file.
"""

import collections
import json
import operator
import sys

import mpmath
import numpy
import scipy.sparse
import scipy.sparse.linalg

mpmath.mp.dps = 40
mpf, mpc = mpmath.mpf, mpmath.mpc

AGREE = 1e-9  # relative, the accuracy that idlewire promises for its answers
# Below this a difference of two voltages of 1e2 V is the last digit of a double and no answer.
SOFT_OHM = 10e3  # from earth, from here on a point is soft: an instrument's common lead may move it
LEAST_VOLTS = 1e-12
LEAST_AMPERES = 1e-15
RESIDUAL = 1e-30  # of the solution, relative to the sum of the terms of its row
BITS = 200  # of the integers that stand for admittances and potentials, after the binary point
WEAK = 1e-4  # S; through less than this an island keeps its own base potential


def complex_of(pair):
    return mpc(pair[0], pair[1])


def fixed(x):
    """The integer that stands for x, in units of 2^-BITS."""
    return int(mpmath.ldexp(x, BITS))


def dot(a, b):
    return sum(map(operator.mul, a, b))


class Network:
    """The file, with the nodes between the cells of a line added: blocks of admittance and EMFs.

    A block is (drops, y): drops are pairs of nodes (a, b), y the admittance matrix from the voltages
    v_a - v_b to the currents from a to b.
    """

    def __init__(self, file):
        self.names = list(file["nodes"])
        self.nodes = len(self.names)
        self.omega = 2 * mpmath.pi * mpf(file["frequency_Hz"])
        self.blocks, self.joined, self.emfs = [], [], []
        for line in file["lines"]:
            self._add_line(line)
        for element in file["elements"]:
            y = complex_of(element["admittance_S"])
            self._add(tuple(element["between"]), y)
        for source in file["sources"]:
            y = 1 / complex_of(source["impedance_ohm"])
            self._add(tuple(source["between"]), y)
            self.emfs.append((*source["between"], y * complex_of(source["volts"])))

    def _add(self, drop, y):
        self.blocks.append(([drop], [[y]]))
        if abs(y) > WEAK:
            self.joined.append(drop)

    def _add_line(self, line):
        n, cells = len(line["conductors"]), line["cells"]
        step = mpf(line["length_m"]) / cells
        z = line["impedance_ohm_per_m"]
        series = mpmath.matrix(n, n)
        for i in range(n):
            for j in range(n):
                series[i, j] = mpc(z["re"][i][j], z["im"][i][j]) * step
        series = (series**-1).tolist()
        shunt = [
            [
                mpc(line["conductance_S_per_m"][i][j], self.omega * mpf(line["capacitance_F_per_m"][i][j])) * step / 2
                for j in range(n)
            ]
            for i in range(n)
        ]
        ends = [line["from"]]
        for _ in range(cells - 1):
            ends.append(list(range(self.nodes, self.nodes + n)))
            self.nodes += n
        ends.append(line["to"])
        for a, b in zip(ends, ends[1:]):
            self.blocks.append((list(zip(a, b)), series))
            self.joined += zip(a, b)
            for end in (a, b):
                self.blocks.append(([(node, 0) for node in end], shunt))


def islands(network):
    """For each node the least node of its island: 0 for whatever hangs on earth."""
    root = list(range(network.nodes))

    def find(node):
        while root[node] != node:
            root[node] = root[root[node]]
            node = root[node]
        return node

    for a, b in network.joined:
        a, b = find(a), find(b)
        root[max(a, b)] = min(a, b)
    return [find(node) for node in range(network.nodes)]


class System:
    """The nodal equations in the unknowns of the island basis, and their solution to 40 digits."""

    def __init__(self, network):
        self.network = network
        self.root = islands(network)
        rows = collections.defaultdict(lambda: collections.defaultdict(mpc))
        for drops, y in network.blocks:
            self._stamp(rows, drops, y)
        self.loose = {r for r in set(self.root) - {0} if not any(rows[r].values())}
        for r in self.loose:  # nothing ties this island to anything: its potential is free
            rows[r] = {r: mpc(1)}
        self.columns = [list(rows[u]) if u else [] for u in range(network.nodes)]
        self.values = [list(rows[u].values()) if u else [] for u in range(network.nodes)]
        self.integers = [([fixed(v.real) for v in row], [fixed(v.imag) for v in row]) for row in self.values]
        self.sizes = [[abs(complex(v)) for v in row] for row in self.values]
        self.inner = scipy.sparse.linalg.splu(self._rounded(), permc_spec="MMD_AT_PLUS_A")

    def unknowns(self, node):
        """Whose sum is the node's potential: its island's base, and its own deviation from it."""
        base = self.root[node]
        return {u for u in (base, node) if u}

    def _stamp(self, rows, drops, y):
        signs = []
        for a, b in drops:
            plus, minus = self.unknowns(a), self.unknowns(b)
            signs.append([(u, 1) for u in plus - minus] + [(u, -1) for u in minus - plus])
        for i, left in enumerate(signs):
            for j, right in enumerate(signs):
                if not y[i][j]:
                    continue
                for u, s in left:
                    row = rows[u]
                    for w, t in right:
                        row[w] += y[i][j] if s == t else -y[i][j]

    def _rounded(self):
        i = [u - 1 for u, row in enumerate(self.columns) for _ in row]
        j = [w - 1 for row in self.columns for w in row]
        v = [complex(value) for row in self.values for value in row]
        n = self.network.nodes - 1
        return scipy.sparse.csc_matrix((v, (i, j)), shape=(n, n))

    def solve(self, injected, least=RESIDUAL):
        """Node potentials for currents {node: A} injected from earth, as a list of mpc."""
        n = self.network.nodes
        b = [[0] * n, [0] * n]  # real and imaginary parts, in units of 2^-(2 BITS)
        for node, current in injected.items():
            for u in self.unknowns(node) - self.loose:
                b[0][u] += fixed(current.real) << BITS
                b[1][u] += fixed(current.imag) << BITS
        x = [[0] * n, [0] * n]  # likewise, in units of 2^-BITS
        residual, self.residual = b, 0.0
        for _ in range(30):
            # Scaled so that a residual of 1e-35 A is a number like any other to the inner solver.
            scale = max(max(map(abs, part)) for part in residual)
            if scale == 0:
                break
            scaled = numpy.array([complex(re / scale, im / scale) for re, im in zip(*residual)][1:])
            step = self.inner.solve(scaled)
            for part, moved in zip(x, (step.real.tolist(), step.imag.tolist())):
                for u in range(1, n):
                    over, under = moved[u - 1].as_integer_ratio()
                    part[u] += over * scale // (under << BITS)
            residual, self.residual = self._residual(x, b)
            if self.residual < least:
                break
        else:
            raise ArithmeticError(f"the refinement stands at a residual of {self.residual:.1e}")
        potentials = [mpc(mpf(re), mpf(im)) / 2**BITS for re, im in zip(*x)]
        return [sum((potentials[u] for u in self.unknowns(node)), mpc(0)) for node in range(n)]

    def _residual(self, x, b):
        """b - A x, and the largest of its rows relative to the sum of the magnitudes of the row's terms."""
        one = 1 << 2 * BITS
        rough = [abs(complex(re / (1 << BITS), im / (1 << BITS))) for re, im in zip(*x)]
        residual, worst = [[0], [0]], 0.0
        for u in range(1, len(rough)):
            columns = self.columns[u]
            a_re, a_im = self.integers[u]
            x_re, x_im = ([part[w] for w in columns] for part in x)
            re = b[0][u] - dot(a_re, x_re) + dot(a_im, x_im)
            im = b[1][u] - dot(a_re, x_im) - dot(a_im, x_re)
            terms = abs(complex(b[0][u] / one, b[1][u] / one)) + dot(self.sizes[u], [rough[w] for w in columns])
            if terms:
                worst = max(worst, abs(complex(re / one, im / one)) / terms)
            residual[0].append(re)
            residual[1].append(im)
        return residual, worst

    def sources(self):
        """What the EMFs inject at each node."""
        injected = collections.defaultdict(mpc)
        for a, b, current in self.network.emfs:
            injected[a] += current
            injected[b] -= current
        injected.pop(0, None)
        return injected


def plain_double(network):
    """What the ordinary nodal equations give in double precision, as complex potentials."""
    i, j, v = [], [], []
    b = numpy.zeros(network.nodes, dtype=complex)
    for drops, y in network.blocks:
        for k, (a0, b0) in enumerate(drops):
            for m, (a1, b1) in enumerate(drops):
                for row, s in ((a0, 1), (b0, -1)):
                    for column, t in ((a1, 1), (b1, -1)):
                        i.append(row), j.append(column), v.append(s * t * complex(y[k][m]))
    for p, q, current in network.emfs:
        b[p] += complex(current)
        b[q] -= complex(current)
    a = scipy.sparse.csc_matrix((v, (i, j)), shape=(network.nodes, network.nodes))
    potentials = numpy.zeros(network.nodes, dtype=complex)
    potentials[1:] = scipy.sparse.linalg.splu(a[1:, 1:].tocsc()).solve(b[1:])
    return potentials


class Comparison:
    """Counts what was compared, and keeps the worst of each kind."""

    def __init__(self):
        self.worst = collections.OrderedDict()
        self.wrong = []

    def check(self, kind, where, given, expected, least):
        count, worst = self.worst.get(kind, (0, 0.0))
        error = float(abs(given - expected))
        size = float(abs(expected))
        relative = error / max(size, least / AGREE)
        self.worst[kind] = (count + 1, max(worst, relative))
        if not error <= AGREE * size + least:
            self.wrong.append(
                f"{where}: {kind} {mpmath.nstr(mpmath.mpmathify(given), 13)}, solved anew {mpmath.nstr(expected, 13)}"
            )

    def report(self):
        for kind, (count, worst) in self.worst.items():
            print(f"  {kind:<24} {count:6d} compared, worst relative difference {worst:.1e}")
        for line in self.wrong[:20]:
            print("WRONG " + line)
        if len(self.wrong) > 20:
            print(f"WRONG and {len(self.wrong) - 20} more")
        return not self.wrong


class Ports:
    """Source impedances between any two nodes, each node's column solved once."""

    def __init__(self, system):
        self.system = system
        self.columns = {0: [mpc(0)] * system.network.nodes}

    def column(self, node):
        if node not in self.columns:
            self.columns[node] = self.system.solve({node: mpc(1)}, least=1e-20)
        return self.columns[node]

    def impedance(self, a, b):
        za, zb = self.column(a), self.column(b)
        return za[a] - za[b] - zb[a] + zb[b]

    def matrix(self, a, b):
        """Impedances of both nodes counted from earth, mutual ones included."""
        za, zb = self.column(a), self.column(b)
        return mpmath.matrix([[za[a], zb[a]], [za[b], zb[b]]])


def instrument_admittance(instrument, range_volts, omega):
    resistance = instrument["resistance_ohm"]
    for r in instrument["ranges"]:
        if r["full_scale_V"] == range_volts:
            resistance = r["resistance_ohm"]
    return mpc(1 / mpf(resistance), omega * mpf(instrument["capacitance_F"]))


def shown_between(instrument, range_volts, ports, volts, node, other, reference):
    """What the instrument shows. Its common lead, on `other`, has a capacitance to earth, which matters where
    both points are soft; to ground, and where a point is stiff, it counts for nothing."""
    omega = ports.system.network.omega
    y = instrument_admittance(instrument, range_volts, omega)
    common = mpc(0, omega * mpf(instrument.get("common_to_earth_F", 0)))
    if common and reference not in ("ground", "earth"):
        z = ports.matrix(node, other)
        if min(abs(z[0, 0]), abs(z[1, 1])) >= SOFT_OHM:
            load = mpmath.matrix([[y, -y], [-y, y + common]])
            v = mpmath.lu_solve(mpmath.eye(2) + z * load, mpmath.matrix([volts[node], volts[other]]))
            return abs(v[0] - v[1])
    return abs((volts[node] - volts[other]) / (1 + y * ports.impedance(node, other)))


def check_place(comparison, file, findings_instruments, system, ports, volts, conductor, place):
    where = f"{conductor} at {place['place']}"

    def node_of(name):
        return 0 if name == "earth" else file["at"][f"{name}@{place['place']}"]

    node = node_of(conductor)
    opened = place["open_circuit"]
    reference = node_of(opened["reference"])
    v = volts[node] - volts[reference]
    given = mpmath.rect(opened["volts"], mpmath.radians(opened["angle_deg"]))
    comparison.check("open-circuit phasor", where, given, v, LEAST_VOLTS)
    if node != reference and place["source_impedance"]["ohms"] is not None:
        z = ports.impedance(node, reference)
        printed = place["source_impedance"]
        given = mpmath.rect(printed["ohms"], mpmath.radians(printed["angle_deg"]))
        comparison.check("source impedance", where, given, z, 0.0)
        comparison.check("short-circuit current", where, mpf(place["short_circuit_A"]), abs(v / z), LEAST_AMPERES)
    for reading in place["readings"]:
        other = node_of(reading["reference"])
        instrument = findings_instruments[reading["instrument"]]
        shown = shown_between(instrument, reading["range_V"], ports, volts, node, other, reading["reference"])
        comparison.check("reading", f"{where}, {reading['instrument']} to {reading['reference']}",
                         mpf(reading["volts"]), shown, LEAST_VOLTS)


def check_solution(comparison, file, system, volts):
    for node, given in enumerate(file["solution_V"]):
        free = system.root[node] in system.loose
        if free != (given is None):
            comparison.wrong.append(f"{file['nodes'][node]}: determined by one side only")
        elif not free:
            comparison.check("node voltage", file["nodes"][node], complex_of(given), volts[node], LEAST_VOLTS)


def report_plain_double(system, volts):
    floating = [n for n in range(1, system.network.nodes) if system.root[n] and system.root[n] not in system.loose]
    if not floating or system.loose:
        return
    plain = plain_double(system.network)
    errors = [float(abs(mpc(plain[n]) - volts[n]) / abs(volts[n])) for n in floating if abs(volts[n]) > LEAST_VOLTS]
    if errors:
        print(f"  plain nodal equations in double precision: floating volts wrong by up to {max(errors):.1e}")


def main(arguments):
    if len(arguments) not in (1, 2):
        print(__doc__.split("\n\n")[1].strip(), file=sys.stderr)
        return 2
    files = []
    for name in arguments:
        with open(name, encoding="utf-8") as opened:
            files.append(json.load(opened))
    formats = ["idlewire-network/1", "idlewire-findings/1"]
    for name, file, expected in zip(arguments, files, formats):
        if file.get("format") != expected:
            print(f"{name}: format is {file.get('format')}, not {expected}", file=sys.stderr)
            return 2
    system = System(Network(files[0]))
    volts = system.solve(system.sources())
    print(f"{system.network.nodes} nodes, {len(set(system.root)) - 1} floating islands, "
          f"residual {system.residual:.1e}")
    report_plain_double(system, volts)
    comparison = Comparison()
    check_solution(comparison, files[0], system, volts)
    if len(files) == 2:
        instruments = {i["name"]: i for i in files[1]["instruments"]}
        ports = Ports(system)
        for conductor in files[1]["conductors"]:
            for place in conductor["places"]:
                check_place(comparison, files[0], instruments, system, ports, volts, conductor["id"], place)
    return 0 if comparison.report() else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
