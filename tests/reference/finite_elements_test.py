"""The capacitance of whole sections against finite elements.

FreeFem++ (Debian's freefem++) meshes the sections that the program in the environment variable
SECTION_MATRICES prints, solves for one conductor at 1 V at a time with quadratic elements and takes the
matrix from the fields' energy, losses included. Circles become polygons of n and of 2 n sides, so the
error falls fourfold from one mesh to the next: the two meshes are extrapolated, and they must close in
on the answer by about that factor.

Over a plane the region is cut off by a half circle. With the arc earthed every multipole of the field
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

    def outline(name, x, y, r, label, count, first="0", last="2*pi"):
        point = f"x={x:.17g}+{r:.17g}*cos(t);y={y:.17g}+{r:.17g}*sin(t)"
        lines.append(f"border {name}(t={first},{last}){{{point};label={label};}}")
        terms.append(f"{name}({count})")

    if section["tube_radius"] > 0:
        outline("tube", 0, 0, section["tube_radius"] * 1e3, 1, 4 * sides)
    else:
        near = 40.0  # mm: the plane is meshed finely under the section, coarsely farther out
        for name, left, right, count in (("west", -arc_radius, -near, sides), ("under", -near, near, 3 * sides),
                                         ("east", near, arc_radius, sides)):
            lines.append(f"border {name}(t={left},{right}){{x=t;y=0;label=1;}}")
            terms.append(f"{name}({count})")
        outline("arc", 0, 0, arc_radius, 2, 2 * sides, last="pi")
    for i, c in enumerate(section["circles"]):
        outline(f"d{i}", c["x"] * 1e3, c["y"] * 1e3, c["r"] * 1e3, 100 + i, sides_of(c, sides))
    for i, c in enumerate(section["conductors"]):
        outline(f"m{i}", c["x"] * 1e3, c["y"] * 1e3, c["r"] * 1e3, 10 + i, f"-{sides}")  # clockwise: a hole
    return "\n".join(lines), "+".join(terms)


def sides_of(circle, sides):
    """Larger circles get more sides."""
    return round(sides * max(1, circle["r"] / 2e-3))


def material(circle, sides):
    """A triangle inside a polygon has its centroid inside the polygon's inner circle or on its very rim."""
    inner = f"({circle['r'] * 1e3:.17g}*cos(pi/{sides_of(circle, sides)}))"
    distance = f"(x-({circle['x'] * 1e3:.17g}))^2+(y-({circle['y'] * 1e3:.17g}))^2"
    return f"eps = ({distance} < {inner}^2) ? {circle['e'][0]:.17g}+1i*({circle['e'][1]:.17g}) : eps;"


def script(section, sides, arc_radius, arc_earthed):
    lines, terms = borders(section, sides, arc_radius)
    count = len(section["conductors"])
    labels = [str(10 + i) for i in range(count)]
    earthed = ["1"] + (["2"] if arc_earthed else [])
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


def truncated(section, sides):
    """Over a plane the mean of both arcs, in a tube the tube; and half of what the arcs differ by."""
    earthed, size = finite_elements(section, sides)
    if section["tube_radius"] > 0:
        return earthed, 0 * earthed.real, size
    free, _ = finite_elements(section, sides, arc_earthed=False)
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

    def test_a_wrong_permittivity_is_found(self):
        section = json.loads(json.dumps(self.sections["five_in_metal_tube"]))
        engine = numpy.array(section["capacitance_F_per_m"])
        for circle in section["circles"]:
            circle["e"][0] *= 1.02
        planted, _ = finite_elements(section, 48)
        self.assertGreater(off(planted, engine, engine), 6e-3)


if __name__ == "__main__":
    unittest.main()
