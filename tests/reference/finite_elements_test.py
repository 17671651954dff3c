"""The capacitance of whole sections against finite elements.

FreeFem++ (Debian's freefem++) meshes the sections that the program in the environment variable
SECTION_MATRICES prints, solves for one conductor at 1 V at a time with quadratic elements and takes the
matrix from the fields' energy, losses included. Arcs become polygons of n and of 2 n sides, so the
error falls fourfold from one mesh to the next: the two meshes are extrapolated, and they must close in
on the answer by about that factor.

Over a plane the region is cut off by a half circle, in the open by a circle. With the arc earthed every multipole of the field
meets an image of one sign, with no flux through it an image of the other: the truth lies between, and the
mean is free of both to first order.
"""

import json
import os
import subprocess
import tempfile
import unittest

import numpy

EPSILON_0 = 8.8541878128e-12  # F/m, CODATA 2018


def borders(section, sides, arc_radius):
    """FreeFem++ text of the outlines, and of the sum that buildmesh takes. Label 1 is earthed, 2 is the arc."""
    lines, terms = [], []

    def arc(name, x, y, r, label, count, first="0", last="2*pi"):
        point = f"x={x:.17g}+{r:.17g}*cos(t);y={y:.17g}+{r:.17g}*sin(t)"
        lines.append(f"border {name}(t={first},{last}){{{point};label={label};}}")
        terms.append(f"{name}({count})")

    def side(name, begin, end, label, count):
        point = ";".join(f"{axis}={a:.17g}+({b - a:.17g})*t" for axis, a, b in zip("xy", begin, end))
        lines.append(f"border {name}(t=0,1){{{point};label={label};}}")
        terms.append(f"{name}({count})")

    kind = section["surroundings"]
    if kind == "tube":
        arc("tube", 0, 0, section["tube_radius"] * 1e3, 1, 4 * sides)
    elif kind == "rectangle":
        w, h = (1e3 * half for half in section["half_size"])
        corners = [(-w, -h), (w, -h), (w, h), (-w, h)]
        for k, corner in enumerate(corners):
            side(f"wall{k}", corner, corners[(k + 1) % 4], 1, 2 * sides)
    elif kind == "plane":
        near = 40.0  # mm: the plane is meshed finely under the section, coarsely farther out
        side("west", (-arc_radius, 0), (-near, 0), 1, sides)
        side("under", (-near, 0), (near, 0), 1, 3 * sides)
        side("east", (near, 0), (arc_radius, 0), 1, sides)
        arc("arc", 0, 0, arc_radius, 2, 2 * sides, last="pi")
    else:
        arc("arc", 0, 0, arc_radius, 2, 2 * sides)
    for i, c in enumerate(section["circles"]):
        x, y, r, w, h = (1e3 * c[key] for key in "xyrwh")
        count = sides_of(c, sides)
        if w == h == 0:
            arc(f"d{i}", x, y, r, 100 + i, count)
            continue
        straight = max(1, round(count * 2 * (w + h) / (2 * numpy.pi * r)))
        first = "-pi/2" if w > 0 else "0"  # of the arc that ends where the side begins
        arc(f"d{i}a", x + w, y + (h if h > 0 else 0), r, 100 + i, count // 2, first, f"{first}+pi")
        arc(f"d{i}b", x - w, y - (h if h > 0 else 0), r, 100 + i, count // 2, f"{first}+pi", f"{first}+2*pi")
        across = (0, r) if w > 0 else (-r, 0)
        ends = [(x + w + across[0], y + h + across[1]), (x - w + across[0], y - h + across[1])]
        back = [(x - w - across[0], y - h - across[1]), (x + w - across[0], y + h - across[1])]
        side(f"d{i}c", *ends, 100 + i, straight)
        side(f"d{i}e", *back, 100 + i, straight)
    for i, c in enumerate(section["conductors"]):
        arc(f"m{i}", c["x"] * 1e3, c["y"] * 1e3, c["r"] * 1e3, 10 + i, f"-{sides}")  # clockwise: a hole
    return "\n".join(lines), "+".join(terms)


def sides_of(circle, sides):
    """Larger circles get more sides."""
    return 2 * round(sides * max(1, circle["r"] / 2e-3) / 2)


def material(circle, sides):
    """A triangle inside a polygon has its centroid inside the polygon's inner circle or on its very rim."""
    inner = f"({circle['r'] * 1e3:.17g}*cos(pi/{sides_of(circle, sides)}))"
    x, y, w, h = (1e3 * circle[key] for key in "xywh")
    distance = f"max(abs(x-({x:.17g}))-{w:.17g},0.)^2+max(abs(y-({y:.17g}))-{h:.17g},0.)^2"
    return f"eps = ({distance} < {inner}^2) ? {circle['e'][0]:.17g}+1i*({circle['e'][1]:.17g}) : eps;"


def script(section, sides, arc_radius, arc_earthed):
    lines, terms = borders(section, sides, arc_radius)
    count = len(section["conductors"])
    labels = [str(10 + i) for i in range(count)]
    earthed = (["1"] if section["surroundings"] != "open" else []) + (["2"] if arc_earthed else [])
    solves = "\n".join(
        f"varf one{k}(u,v)=on({labels[k]},u=1)+on({','.join(earthed + labels[:k] + labels[k + 1:])},u=0); "
        f"complex[int] b{k}=one{k}(0,Vh); phi[{k}][]=A^-1*b{k};" for k in range(count))
    return f"""
{lines}
mesh Th=buildmesh({terms});
fespace Vh(Th,P2); fespace Ph(Th,P0);
Ph<complex> eps=1.0+0i;
{chr(10).join(material(c, sides) for c in section["circles"])}
varf laplace(u,v)=int2d(Th)(eps*(dx(u)*dx(v)+dy(u)*dy(v)))+on({",".join(earthed + labels)},u=0);
matrix<complex> A=laplace(Vh,Vh);
set(A,solver=sparsesolver);
Vh<complex>[int] phi({count});
{solves}
cout.precision(15);
cout<<"size "<<Vh.ndof<<endl;
for(int i=0;i<{count};i++) for(int j=0;j<{count};j++) {{
  complex c=int2d(Th)(eps*(dx(phi[i])*dx(phi[j])+dy(phi[i])*dy(phi[j])));
  cout<<"c "<<real(c)<<" "<<imag(c)<<endl; }}
"""


def finite_elements(section, sides, arc_earthed=True, arc_radius=400.0):
    """Complex capacitance matrix, F/m, and the number of unknowns."""
    with tempfile.TemporaryDirectory() as folder:
        path = os.path.join(folder, "section.edp")
        with open(path, "w", encoding="ascii") as file:
            file.write(script(section, sides, arc_radius, arc_earthed))
        run = subprocess.run(["FreeFem++-nw", "-v", "0", "-ne", path], cwd=folder, capture_output=True, text=True)
    if run.returncode:
        raise RuntimeError(run.stdout + run.stderr)
    words = [line.split() for line in run.stdout.splitlines()]
    values = [complex(float(w[1]), float(w[2])) for w in words if w and w[0] == "c"]
    size = next(int(w[1]) for w in words if w and w[0] == "size")
    n = len(section["conductors"])
    return EPSILON_0 * numpy.array(values).reshape(n, n), size


def without_net_charge(section, matrix):
    """In the open all charges add up to nothing (Clements, Paul and Adams 1975), and the reference is left out."""
    if section["surroundings"] != "open":
        return matrix
    sums = matrix.sum(axis=1)
    if abs(sums.sum()) > 1e-6 * abs(matrix).max():  # else no flux leaves by the arc anyway
        matrix = matrix - numpy.outer(sums, sums) / sums.sum()
    kept = [i for i in range(len(matrix)) if i != section["reference"]]
    return matrix[numpy.ix_(kept, kept)]


def truncated(section, sides):
    """With an arc the mean of both kinds, else the enclosure alone; and half of what the arcs differ by."""
    earthed, size = finite_elements(section, sides)
    earthed = without_net_charge(section, earthed)
    if section["surroundings"] in ("tube", "rectangle"):
        return earthed, 0 * earthed.real, size
    free, _ = finite_elements(section, sides, arc_earthed=False)
    free = without_net_charge(section, free)
    return (earthed + free) / 2, abs(earthed - free) / 2, size


def off(a, b, c):
    """The error norm of the program: max |dC_ij| / sqrt(C_ii C_jj)."""
    scale = numpy.sqrt(numpy.diag(c.real))
    return numpy.abs((a - b) / numpy.outer(scale, scale)).max()


class FiniteElements(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        run = subprocess.run([os.environ["SECTION_MATRICES"]], capture_output=True, text=True, check=True)
        cls.sections = json.loads(run.stdout)

    def agree(self, name, sides):
        section = self.sections[name]
        engine = numpy.array(section["capacitance_F_per_m"]) - 1j * numpy.array(section["loss_capacitance_F_per_m"])
        coarse, _, few = truncated(section, sides)
        fine, arcs, many = truncated(section, 2 * sides)
        best = fine + (fine - coarse) / 3
        scale = numpy.sqrt(numpy.diag(engine.real))
        arcs = (arcs / numpy.outer(scale, scale)).max()
        errors = [off(m, engine, engine) for m in (coarse, fine, best)]
        loss = numpy.abs((best - engine).imag / numpy.outer(scale, scale)).max()
        print(f"{name}: {few} and {many} unknowns, off by {errors[0]:.1e} and {errors[1]:.1e}, extrapolated "
              f"{errors[2]:.1e}, its loss {loss:.1e}; half of what the arcs differ by {arcs:.1e}", flush=True)
        self.assertLess(errors[2], 5e-4)  # 1e-4 is the program's own, the rest is left for the mesh
        self.assertLess(loss, 5e-5)  # the same part of a loss that is a tenth
        self.assertGreater(errors[0] / errors[1], 2.5)  # 4 in theory
        self.assertLess(arcs, 2e-3)  # squared, it is what the mean of the arcs leaves

    def test_five_insulated_wires_in_a_metal_tube(self):
        self.agree("five_in_metal_tube", 24)

    def test_plastic_tube_and_filled_cable_over_a_plane(self):
        self.agree("tube_and_cable_over_plane", 20)

    def test_flat_cable_in_the_open(self):
        self.agree("flat_cable_in_the_open", 24)

    def test_flat_cable_over_a_plane(self):
        self.agree("flat_cable_over_plane", 24)

    def test_two_jacketed_cables_side_by_side(self):
        self.agree("two_jacketed_cables", 24)

    def test_wires_and_a_flat_cable_in_a_wireway(self):
        self.agree("wires_in_a_wireway", 32)

    def test_a_wrong_permittivity_is_found(self):
        section = json.loads(json.dumps(self.sections["five_in_metal_tube"]))
        engine = numpy.array(section["capacitance_F_per_m"])
        for circle in section["circles"]:
            circle["e"][0] *= 1.02
        planted, _ = finite_elements(section, 48)
        self.assertGreater(off(planted, engine, engine), 6e-3)


if __name__ == "__main__":
    unittest.main()
