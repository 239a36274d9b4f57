"""How far each bounded case moves when its decimal inputs are rounded to binary64.

The values of the case files are exact for the decimal inputs; a program reads the nearest
binary64 numbers.  This script fills `value_at` and `input_sensitivity` (an absolute bound, as a
decimal string) of every bounded case and rewrites the files.  Run it from this folder:

    python3 sensitivity.py

It needs mpmath, and is needed neither to build nor to test.  The bounds:

* Conductances: a triangulation maps the section onto the rounded one, affinely on each triangle.
  The distortion K of that map bounds the change: G/K <= G' <= K G (Ahlfors 1966, quasi-invariance of
  the Dirichlet integral).  Among all triangulations the one with the least distortion is used.
* Potentials at a rounded point: |grad u| <= (4/pi) M/d for |u| <= M in a disc of radius d
  (gradient bound for harmonic functions), with half the range of the data for M.
* Conformal radii: the section scaled by 1 +- delta/d about the point encloses the rounded one.
* Triangles: the value is computed again at the rounded vertices from the triangle map.
* Centres of regular polygons: Hadamard's variation, integrated over the circle.
"""

import json
from fractions import Fraction

import mpmath as mp

mp.mp.dps = 40
FILES = ["seepage", "heat", "conductors", "maps", "dirichlet"]


def rounding(text):
    """Rounding error of a decimal string read as binary64, exactly."""
    return Fraction(float(text)) - Fraction(text)


def real(fraction):
    return mp.mpf(fraction.numerator) / fraction.denominator


def cplx(point):
    return mp.mpc(real(Fraction(point[0])), real(Fraction(point[1])))


def cplx_binary(point):
    return mp.mpc(float(point[0]), float(point[1]))


def displacement(points):
    return max(abs(mp.mpc(real(rounding(p[0])), real(rounding(p[1])))) for p in points)


def beltrami(triangle, image):
    """|mu| of the affine map of one triangle onto another, or None if either is not anticlockwise."""
    e1, e2 = triangle[1] - triangle[0], triangle[2] - triangle[0]
    f1, f2 = image[1] - image[0], image[2] - image[0]
    area = mp.im(mp.conj(e1) * e2)
    if area <= 0 or mp.im(mp.conj(f1) * f2) <= 0:
        return None
    det = e1 * mp.conj(e2) - e2 * mp.conj(e1)
    p = (f1 * mp.conj(e2) - f2 * mp.conj(e1)) / det
    q = (f2 * e1 - f1 * e2) / det
    return abs(q / p)


def distortion(points):
    """K - 1 of the best piecewise affine map of the section onto the rounded section.

    All triangles of a combinatorial triangulation being anticlockwise, they tile the section: their
    indicator functions add up to the winding number of the outline.
    """
    z = [cplx(p) for p in points]
    w = [cplx_binary(p) for p in points]
    n = len(z)
    best = {(i, i + 1): mp.mpf(0) for i in range(n)}
    for span in range(2, n):
        for i in range(n - span):
            j = i + span
            costs = []
            for k in range(i + 1, j):
                if (i, k) in best and (k, j) in best:
                    mu = beltrami([z[i], z[k], z[j]], [w[i], w[k], w[j]])
                    if mu is not None:
                        costs.append(max(mu, best[i, k], best[k, j]))
            if costs:
                best[i, j] = min(costs)
    mu = best[0, n - 1]
    return 2 * mu / (1 - mu)


def distance(point, points):
    z0 = cplx(point)
    z = [cplx(p) for p in points]
    shortest = mp.inf
    for a, b in zip(z, z[1:] + z[:1]):
        t = mp.re((z0 - a) * mp.conj(b - a)) / abs(b - a) ** 2
        shortest = min(shortest, abs(z0 - a - max(0, min(1, t)) * (b - a)))
    return shortest


def theta(z, cut):
    """Angle of z from the direction `cut`, in [0, 2 pi)."""
    angle = mp.arg(z / cut)
    return angle if angle >= 0 else angle + 2 * mp.pi


BOUNDARY = {
    "x^2": lambda z: z.real**2,
    "y^2-x": lambda z: z.imag**2 - z.real,
    "x^3+x*y": lambda z: z.real**3 + z.real * z.imag,
    "r^(2/3)*sin(2*theta/3)": lambda z: abs(z - mp.mpc(1, 1)) ** (mp.mpf(2) / 3)
    * mp.sin(2 * theta(z - mp.mpc(1, 1) or mp.mpc(1), mp.mpc(0, 1)) / 3),
    "x*(1-x)": lambda z: z.real * (1 - z.real),
    "x-x^3": lambda z: z.real - z.real**3,
    "exp(x) sin(y)": lambda z: mp.exp(z.real) * mp.sin(z.imag),
    "x^2-y^2": lambda z: z.real**2 - z.imag**2,
    "Re (x+iy)^5": lambda z: (z**5).real,
    "ln|z-(20+7i)|": lambda z: mp.log(abs(z - mp.mpc(20, 7))),
    "r^(1/2)*sin(theta/2)": lambda z: mp.sqrt(abs(z)) * mp.sin(theta(z or mp.mpc(1), 1) / 2),
}


def data_range(case):
    z = [cplx(p) for p in case["vertices"]]
    values = []
    for side, a, b in zip(case["sides"], z, z[1:] + z[:1]):
        if side == "insulated":
            continue
        if "held" in side:
            values.append(mp.mpf(side["held"]))
        else:
            f = BOUNDARY[side["function"]]
            values += [f(a + (b - a) * mp.mpf(k) / 40) for k in range(41)]
    return max(values) - min(values)


def triangle_measure(z, point):
    """Harmonic measure, seen from `point`, of the side from the first vertex to the second."""
    a = mp.arg((z[2] - z[0]) / (z[1] - z[0])) / mp.pi
    b = mp.arg((z[0] - z[1]) / (z[2] - z[1])) / mp.pi
    whole = mp.beta(a, b)
    image = (point - z[0]) / (z[1] - z[0])
    t = mp.findroot(
        lambda t: t**a / a * mp.hyp2f1(a, 1 - b, a + 1, t) / whole - image, mp.mpc(0.5, 0.6)
    )
    return (mp.arg(t - 1) - mp.arg(t)) / mp.pi


def centre_variation(n, held):
    """Integral of |du/dn| against harmonic measure from the centre of the regular n-gon, radius 1.

    Map f(w) = c int (1 - w^n)^(-2/n) dw; on the circle ds/dtheta = c |1 - w^n|^(-2/n).
    """
    c = n / mp.beta(mp.mpf(1) / n, 1 - mp.mpf(2) / n)
    step = 2 * mp.pi / n

    def density(t):
        normal = mp.mpf(0)
        for k, value in enumerate(held):
            if value:
                normal += (mp.cot((t - k * step) / 2) - mp.cot((t - (k + 1) * step) / 2)) / (2 * mp.pi)
        return abs(normal) * abs(1 - mp.expjpi(n * t / mp.pi)) ** (mp.mpf(2) / n) / c / (2 * mp.pi)

    with mp.workdps(20):
        return sum(mp.quad(density, [k * step, (k + mp.mpf(1) / 2) * step, (k + 1) * step]) for k in range(n))


def bound(case):
    ask = case["ask"]
    vertices = case["vertices"]
    value = case["value"]
    kind = ask["kind"]
    if kind in ("conductance", "resistance"):
        return distortion(vertices) * abs(mp.mpf(value))
    if kind == "conductance_matrix":
        return distortion(vertices) * max(mp.mpf(value[k][k]) for k in range(len(value)))
    if kind == "conformal_radius":
        return mp.mpf(value) * displacement(vertices) / distance(ask["at"], vertices)
    assert kind == "potential", case["id"]
    exact_everywhere = case["id"].startswith(("harmonic-", "L-singular", "slit-square-singular"))
    if displacement(vertices) == 0 or exact_everywhere:
        point = ask["at"]
        half = data_range(case) / 2
        return 4 / mp.pi * half / distance(point, vertices) * displacement([point])
    if len(vertices) == 3:
        decimal = triangle_measure([cplx(p) for p in vertices], cplx(ask["at"]))
        binary = triangle_measure([cplx_binary(p) for p in vertices], cplx_binary(ask["at"]))
        assert abs(decimal - mp.mpf(value)) < mp.mpf(10) ** -22, case["id"]
        return abs(binary - decimal)
    assert case["id"].startswith("ngon-centre"), case["id"]
    held = [float(side["held"]) for side in case["sides"]]
    return centre_variation(len(vertices), held) * displacement(vertices)


def inputs_are_binary(case):
    texts = [t for v in case["vertices"] if isinstance(v, list) for t in v]
    texts += case["ask"].get("at", [])
    texts += [s["held"] for s in case["sides"] if isinstance(s, dict) and "held" in s]
    return all(rounding(t) == 0 for t in texts)


def dump(path, document):
    line = lambda v: json.dumps(v, ensure_ascii=False)
    about = ",\n".join(f"  {line(k)}: {line(v)}" for k, v in document["about"].items())
    cases = ",\n".join(
        "{\n" + ",\n".join(f"  {line(k)}: {line(v)}" for k, v in c.items()) + "\n}"
        for c in document["cases"]
    )
    with open(path, "w", encoding="utf-8") as out:
        out.write('{\n"about": {\n' + about + '\n},\n"cases": [\n' + cases + "\n]\n}\n")


def with_sensitivity(case, as_read=False):
    """The case with the two fields placed after its value; `as_read` if the value was computed at the binary inputs."""
    case = {k: v for k, v in case.items() if k not in ("value_at", "input_sensitivity")}
    if as_read or (case["vertices"] and inputs_are_binary(case)):
        fields = {"value_at": "exact binary", "input_sensitivity": "0"}
    elif case["bounded"]:
        size = bound(case)
        # one unit more in the second digit: the bound is rounded up
        fields = {"value_at": "exact decimal", "input_sensitivity": mp.nstr(size * mp.mpf("1.05"), 2)}
    else:
        fields = {"value_at": "exact decimal", "input_sensitivity": None}
    result = {}
    for key, entry in case.items():
        result[key] = entry
        if key == "value":
            result.update(fields)
    return result


if __name__ == "__main__":
    for name in FILES:
        with open(name + ".json", encoding="utf-8") as text:
            document = json.load(text)
        document["cases"] = [with_sensitivity(c) for c in document["cases"]]
        for c in document["cases"]:
            if c["input_sensitivity"] not in ("0", None):
                print(f"{c['id']:36} {c['input_sensitivity']}")
        dump(name + ".json", document)
