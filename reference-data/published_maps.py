"""Writes published-maps.json: published Schwarz-Christoffel examples with closed forms.

    python3 published_maps.py

It needs mpmath, and is needed neither to build nor to test.  Vertices are binary numbers wherever the
closed form holds for any vertices (triangles) or the outline is rectilinear, and the value holds for
them as they are read.  Regular polygons have decimal vertices; `input_sensitivity` bounds the rounding.
Every value is computed in two ways, which must agree to the digits named in `cross_check`.
"""

import json

import mpmath as mp

from sensitivity import cplx_binary, dump, with_sensitivity

DIGITS = 25
CASES = []


def known(name, case_id):
    """A value of another file of this folder."""
    with open(name + ".json", encoding="utf-8") as text:
        return mp.mpf(next(c for c in json.load(text)["cases"] if c["id"] == case_id)["value"])


def agree(value, second, digits, case_id):
    assert abs(value - second) <= abs(value) * mp.mpf(10) ** -digits, (case_id, value, second)


def text(number):
    """A binary number as its shortest decimal."""
    shortest = repr(float(number))
    return shortest[:-2] if shortest.endswith(".0") else shortest


def points(pairs):
    return [[text(x), text(y)] for x, y in pairs]


def add(case_id, title, section, vertices, angles, ask, value, second, digits, formula, source, check, held=None, also=None):
    """One case; `held` maps sides to their potentials, all others being insulated."""
    agree(value, second, digits, case_id)
    n = len(vertices)
    conditions = "" if held is None else "the sides listed as held are electrodes, the rest is insulated"
    case = {
        "id": case_id,
        "title": title,
        "discipline": "maps",
        "section": section,
        "bounded": True,
        "vertices": vertices,
        "angles_over_pi": [mp.nstr(mp.mpf(a), DIGITS) for a in angles],
        "flat_vertices": [k for k in range(n) if angles[k] == 1],
        "sides": [] if held is None else [{"held": held[k]} if k in held else "insulated" for k in range(n)],
        "conditions": conditions,
        "asked": title,
        "ask": ask,
        "value": mp.nstr(value, DIGITS),
        "tolerance": 1e-10,
        "formula": formula,
        "source": source,
        "how": "closed form computed with mpmath by published_maps.py",
        "cross_check": f"{check} agrees to {digits} significant digits",
        "inputs": {},
    }
    if also:
        case["also"] = also
    CASES.append(case)


def ratio_of_k(lam):
    """Conductance K(sqrt(lam)) / K(sqrt(1 - lam)) of a quadrilateral with cross-ratio lam."""
    return mp.ellipk(lam) / mp.ellipk(1 - lam)


def confirmed_by_theta(lam):
    """The same conductance, once lam is recovered from it: lam = (theta2/theta3)^4 at the nome exp(-pi/G)."""
    value = ratio_of_k(lam)
    nome = mp.exp(-mp.pi / value)
    agree(lam, (mp.jtheta(2, 0, nome) / mp.jtheta(3, 0, nome)) ** 4, 28, f"lambda {lam}")
    return value


# --- Triangles -------------------------------------------------------------------------------------

TRIANGLES = [
    ("345", [(0, 0), (4, 0), (0, 3)], (1, 1)),
    ("right-isosceles", [(0, 0), (1, 0), (0, 1)], (0.25, 0.25)),
    ("equilateral", [(0, 0), (1, 0), (0.5, 0.8660254037844386)], (0.5, 0.25)),
    ("half-equilateral", [(0, 0), (1, 0), (0, 1.7320508075688772)], (0.25, 0.5)),
    ("sliver", [(0, 0), (16, 0), (15, 1)], (8, 0.25)),
    ("obtuse", [(0, 0), (4, 0), (-1, 2)], (0.5, 0.25)),
]


def interior_angles(z):
    n = len(z)
    return [mp.arg((z[k - 1] - z[k]) / (z[(k + 1) % n] - z[k])) / mp.pi for k in range(n)]


def inverse(z, a, b, point, near=None):
    """Point of the upper half-plane that goes to `point`, vertices 0, 1, 2 being at 0, 1, infinity.

    Newton's iteration on ln t, since t is exponentially small far inside a thin corner.
    """
    image = (point - z[0]) / (z[1] - z[0])
    whole = mp.beta(a, b)
    off = lambda w: mp.exp(a * w) / a * mp.hyp2f1(a, 1 - b, a + 1, mp.exp(w)) / whole - image
    leading = mp.log(image * a * whole) / a
    guesses = [near] if near is not None else [leading] + [mp.mpc(x, y) for x in (-0.7, 0, -3) for y in (0.8, 1.6, 2.4)]
    for guess in guesses:
        try:
            w = mp.findroot(off, guess, maxsteps=60)
        except (ValueError, ZeroDivisionError):
            continue
        if 0 < w.imag < mp.pi:
            return mp.exp(w)
    raise ValueError("the triangle map was not inverted")


def triangles():
    source = "classical triangle map (Kober 1957; Driscoll and Trefethen 2002; from memory)"
    for name, pairs, (x, y) in TRIANGLES:
        vertices = points(pairs)
        z = [cplx_binary(p) for p in vertices]
        angles = interior_angles(z)
        a, b, c = angles
        at = [text(x), text(y)]
        p = cplx_binary(at)
        constant = abs(z[1] - z[0]) / mp.beta(a, b)
        other = abs(z[2] - z[1]) / mp.beta(b, c)
        add(
            f"triangle-{name}-constant", "Triangle: constant of the half-plane map with the vertices at 0, 1, infinity",
            "Triangle with the listed vertices", vertices, angles,
            {"kind": "map_constant", "zero": 0, "one": 1, "infinity": 2},
            constant, other, 30, "|C|=|AB|/B(a,b)=|BC|/B(b,c)=|CA|/B(c,a), f'=C t^(a-1) (1-t)^(b-1)",
            source, "the side BC",
        )
        t = inverse(z, a, b, p)
        # the vertices at 0, 1, infinity move to infinity, 0, 1
        rotated = inverse(z[1:] + z[:1], b, c, p, near=mp.log((t - 1) / t) + mp.mpf("0.01"))
        radius = 2 * t.imag * constant * abs(t ** (a - 1) * (1 - t) ** (b - 1))
        second = 2 * rotated.imag * constant * abs(rotated ** (b - 1) * (1 - rotated) ** (c - 1))
        add(
            f"triangle-{name}-radius", f"Triangle: conformal radius at ({at[0]}, {at[1]})",
            "Triangle with the listed vertices", vertices, angles, {"kind": "conformal_radius", "at": at},
            radius, second, 28, "2 Im(t) |f'(t)|, f(t)=A+(B-A) I_t(a,b) inverted by Newton (incomplete beta function)",
            source, "the map with the vertices taken in rotation",
        )
        measure = (mp.arg(t - 1) - mp.arg(t)) / mp.pi
        # the side AB joins infinity and 0 in the rotated map
        second = mp.arg(rotated) / mp.pi
        add(
            f"triangle-{name}-measure", f"Triangle: harmonic measure of the side from vertex 0 to vertex 1 seen from ({at[0]}, {at[1]})",
            "Triangle with the listed vertices", vertices, angles, {"kind": "harmonic_measure", "at": at, "from": 0, "to": 1},
            measure, second, 25, "[arg(t-1)-arg(t)]/pi with t as for the conformal radius",
            source, "the map with the vertices taken in rotation",
        )


# --- Rectangles: crowding --------------------------------------------------------------------------


def rectangles():
    for length in (1, 2, 4, 5, 10, 20, 30):
        m = mp.mfrom(q=mp.exp(-mp.pi * length))
        value = mp.asin(mp.sqrt(m)) / mp.pi
        series = mp.nsum(
            lambda j: (-1) ** int(j) / ((2 * j + 1) * mp.cosh((2 * j + 1) * mp.pi * length / 2)), [0, mp.inf], method="d"
        )
        add(
            f"rectangle-end-{length}", f"Rectangle {length} x 1: harmonic measure of a short end seen from the centre",
            f"Rectangle (0,0),({length},0),({length},1),(0,1)",
            points([(0, 0), (length, 0), (length, 1), (0, 1)]), [mp.mpf(1) / 2] * 4,
            {"kind": "harmonic_measure", "at": [text(length / 2), "0.5"], "from": 1, "to": 2},
            value, 2 / mp.pi * series, 24, "asin(k)/pi, K'(k)/K(k)=length (so that k ~ 4 exp(-pi length/2))",
            "elliptic map of the rectangle; crowding law after Trefethen 1980 and Driscoll and Trefethen 2002 (from memory)",
            "the Fourier series (2/pi) sum (-1)^j/((2j+1) cosh((2j+1) pi length/2))",
            also={
                "gap_on_the_circle": mp.nstr(2 * mp.pi * value, DIGITS),
                "gap_law_8_exp_minus_half_pi_length": mp.nstr(8 * mp.exp(-mp.pi * length / 2), DIGITS),
            },
        )


# --- Regular polygons ------------------------------------------------------------------------------


def regular_polygons():
    for n in (5, 6, 7, 10, 20):
        vertices = [[mp.nstr(mp.cos(2 * mp.pi * k / n), DIGITS), mp.nstr(mp.sin(2 * mp.pi * k / n), DIGITS)] for k in range(n)]
        vertices = [[("0" if abs(mp.mpf(c)) < mp.mpf(10) ** -30 else c) for c in v] for v in vertices]
        angles = [1 - mp.mpf(2) / n] * n
        section = f"Regular {n}-gon in the unit circle"
        one = mp.mpf(1)
        add(
            f"regular-{n}-radius", f"Regular {n}-gon: conformal radius at the centre", section, vertices, angles,
            {"kind": "conformal_radius", "at": ["0", "0"]},
            n / mp.beta(one / n, 1 - 2 * one / n), mp.gamma(1 - one / n) / (mp.gamma(1 + one / n) * mp.gamma(1 - 2 * one / n)),
            30, "n/B(1/n,1-2/n)", "Polya and Szego 1951; Nehari 1952 (from memory)", "the form in gamma functions",
        )
        far = n // 2
        lam = (mp.sin(mp.pi / n) / mp.sin(mp.pi * far / n)) ** 2
        add(
            f"regular-{n}-resistor", f"Regular {n}-gon with electrodes on side 0 and side {far}: conductance",
            section, vertices, angles, {"kind": "conductance", "multiplier": "1"},
            ratio_of_k(lam), confirmed_by_theta(lam), 28,
            "K(sqrt lam)/K(sqrt(1-lam)), lam=(sin(pi/n)/sin(pi k/n))^2, prevertices at the n-th roots of unity",
            "polygonal resistors after Trefethen 1984 (from memory); closed form by symmetry", "lam recovered by theta functions",
            held={0: "1", far: "0"},
        )


# --- The L of three squares ------------------------------------------------------------------------


def three_square_l():
    vertices = points([(1, 2), (0, 2), (0, 0), (2, 0), (2, 1), (1, 1)])
    angles = [mp.mpf(a) / 2 for a in (1, 1, 1, 1, 1, 3)]
    section = "L of three unit squares, vertices (1,2),(0,2),(0,0),(2,0),(2,1),(1,1)"
    source = "Gaier 1972 (from memory); prevertices -1,-sqrt3/2,0,sqrt3/2,1,infinity by three-fold reflection of the square"
    s = mp.sqrt(3) / 2
    long_side = three_square_side(s, 0, s)
    ratio = lambda x: three_square_side(x, 0, x) - 2 * three_square_side(x, x, 1)
    add(
        "l3-prevertex", "L of three squares: |t_3/t_4| with vertex 2 at 0 and vertex 5 at infinity",
        section, vertices, angles,
        {"kind": "prevertex_ratio", "numerator": 3, "denominator": 4, "zero": 2, "infinity": 5},
        s, mp.findroot(ratio, (mp.mpf("0.85"), mp.mpf("0.88")), tol=mp.mpf(10) ** -30), 15,
        "prevertices -1,-sqrt3/2,0,sqrt3/2,1,infinity", source, "solution for sides in the ratio 2 to 1",
    )
    constant = three_square_constant()
    add(
        "l3-constant", "L of three squares: constant of the half-plane map with vertices 2, 4, 5 at 0, 1, infinity",
        section, vertices, angles, {"kind": "map_constant", "zero": 2, "one": 4, "infinity": 5},
        constant, 2 / long_side, 15, "|C|=3/B(1/4,1/2), by t=sin(phi) and sin(3 phi)=4 t (3/4-t^2)", source,
        "quadrature of the side of length 2",
    )


def three_square_side(s, start, end):
    """Length over |C| of a side, prevertices -1, -s, 0, s, 1 and infinity."""
    density = lambda t: 1 / mp.sqrt(abs((t * t - 1) * (t * t - s * s) * t))
    return mp.quad(density, mp.linspace(start, end, 5))


def three_square_constant():
    """2 / int_0^{sqrt3/2} dt / sqrt(t (3/4 - t^2) (1 - t^2)).

    With t = sin(phi): sin(3 phi) = 4 t (3/4 - t^2), so the integral is 2 int_0^{pi/3} dphi / sqrt(sin 3 phi)
    = (2/3) int_0^pi dpsi / sqrt(sin psi) = (2/3) B(1/4, 1/2).
    """
    return 3 / mp.beta(mp.mpf(1) / 4, mp.mpf(1) / 2)


# --- Plus shapes -----------------------------------------------------------------------------------


def plus_speed(theta1):
    """|f'| on the unit circle over |f'(0)|, prevertices +-theta1 and pi/4 mod pi/2."""
    return lambda t: mp.sqrt(2 * abs(mp.cos(2 * t))) / (2 * mp.sqrt(abs(mp.sin(2 * (t - theta1)) * mp.sin(2 * (t + theta1)))))


def plus_lengths(theta1):
    """Half the end and the side of an arm over |f'(0)|, without the singularities of the integrand."""
    # 2 sin(t-a) sin(t+a) = cos 2a - cos 2t; in u = sin(2t)/sin(2a): complete integrals
    k = mp.sin(2 * theta1)
    half_end = mp.quad(lambda p: (1 - (k * mp.sin(p)) ** 2) ** mp.mpf("-0.25"), [0, mp.pi / 4, mp.pi / 2]) / (2 * mp.sqrt(2))
    # u from 1 to 1/k, with k u = sqrt(k^2 + (1 - k^2) sin^2 p)
    kk = 1 - k * k

    def side(p):
        v2 = k * k + kk * mp.sin(p) ** 2
        # (1 - v^2)^(-1/4) (v^2 - k^2)^(-1/2) dv, dv = kk sin p cos p / v dp
        return (kk * mp.cos(p) ** 2) ** mp.mpf("-0.25") * mp.sqrt(kk) * mp.cos(p) / mp.sqrt(v2)

    arm = mp.quad(side, [0, mp.pi / 4, mp.pi / 2]) / (2 * mp.sqrt(2))
    return half_end, arm


def plus_shapes():
    source = "polygonal resistors after Trefethen 1984 (from memory); four-fold symmetry, re-derived"
    for arm in (1, 2, 3):
        ratio = lambda x: (lambda lengths: lengths[1] / (2 * lengths[0]) - arm)(plus_lengths(mp.exp(x)))
        theta1 = mp.exp(mp.findroot(ratio, (mp.log(mp.mpf("0.25")) - mp.mpf(arm - 1) * mp.mpf("1.55"), mp.log(mp.mpf("0.2")) - mp.mpf(arm - 1) * mp.mpf("1.6"))))
        half_end, side = plus_lengths(theta1)
        radius = 1 / (2 * half_end)
        tip = arm + 0.5
        h = 0.5
        vertices = points(
            [(tip, -h), (tip, h), (h, h), (h, tip), (-h, tip), (-h, h), (-tip, h), (-tip, -h), (-h, -h), (-h, -tip), (h, -tip), (h, -h)]
        )
        angles = [mp.mpf(a) / 2 for a in (1, 1, 3) * 4]
        section = f"Plus with arms 1 wide and {arm} long beyond the central square, centred at the origin"
        # a direct quadrature of the side, singular ends and all
        quadrature = mp.quad(plus_speed(theta1), mp.linspace(theta1, mp.pi / 4, 7)) / arm
        formula = "f'(w)=R (1+w^4)^(1/2) [(1-w^4 e^(4i theta))(1-w^4 e^(-4i theta))]^(-1/2), theta from side lengths"
        add(
            f"plus-{arm}-radius", "Plus: conformal radius at the centre", section, vertices, angles,
            {"kind": "conformal_radius", "at": ["0", "0"]}, radius, 1 / quadrature, 15, formula, source,
            "direct quadrature of the side of an arm",
        )
        nearby = mp.sin(theta1) ** 2
        if arm == 1:
            second, digits, check = known("maps", "plus-opposite-ends"), 24, "plus-opposite-ends in maps.json"
            by_lambda = ratio_of_k(nearby)
        else:
            second, digits, check = confirmed_by_theta(nearby), 26, "lam recovered by theta functions"
            by_lambda = ratio_of_k(nearby)
        add(
            f"plus-{arm}-opposite", "Plus with electrodes on two opposite arm ends: conductance", section, vertices, angles,
            {"kind": "conductance", "multiplier": "1"}, by_lambda, second, digits,
            "K(sqrt lam)/K(sqrt(1-lam)), lam=sin^2(theta); " + formula, source, check, held={0: "1", 6: "0"},
        )
        add(
            f"plus-{arm}-adjacent", "Plus with electrodes on two adjacent arm ends: conductance", section, vertices, angles,
            {"kind": "conductance", "multiplier": "1"}, ratio_of_k(2 * nearby), confirmed_by_theta(2 * nearby), 26,
            "K(sqrt lam)/K(sqrt(1-lam)), lam=2 sin^2(theta); " + formula, source, "lam recovered by theta functions", held={0: "1", 3: "0"},
        )
        add(
            f"plus-{arm}-end", "Plus: harmonic measure of an arm end seen from the centre", section, vertices, angles,
            {"kind": "harmonic_measure", "at": ["0", "0"], "from": 0, "to": 1}, theta1 / mp.pi,
            mp.asin(mp.sqrt(nearby)) / mp.pi, 26, "theta/pi; " + formula, source,
            "theta from the cross-ratio of opposite ends (a weak check)",
        )


# --- L-shaped resistors ----------------------------------------------------------------------------


def modulus_with_mu(mu):
    """The elliptic modulus r with (pi/2) K'(r)/K(r) = mu."""
    return mp.sqrt(mp.mfrom(q=mp.exp(-2 * mu)))


def l_resistance(h):
    """Resistance between the arm ends of an L, width 1, outer arm length h: twice the trapezium's."""
    c = 2 * mp.mpf(h) - 1
    t1, t2 = modulus_with_mu(mp.pi / (2 * c)), modulus_with_mu(mp.pi * c / 2)
    r = ((t1 - t2) / (t1 + t2)) ** 2
    return 2 * mp.ellipk(r * r) / mp.ellipk(1 - r * r)


def l_resistors():
    agree(l_resistance(2), known("conductors", "lbend-film-2"), 24, "lbend-film-2")
    agree(l_resistance(3), known("conductors", "lbend-film-3"), 24, "lbend-film-3")
    for h in (1.25, 4, 6, 10):
        value = l_resistance(h)
        # the corner counts for 1 - (2/pi) ln 2 squares, up to terms of order exp(-2 pi (h - 1))
        limit = 2 * (mp.mpf(h) - 1) + 1 - 2 / mp.pi * mp.log(2)
        digits = {1.25: 24, 4: 8, 6: 14, 10: 24}[h]
        check = "the limit of long arms 2(h-1)+1-(2/pi) ln 2, as far as it goes,"
        if h == 1.25:
            limit, check = value, "too short for the limit; the same function, for h = 2 and 3, with conductors.json"
        add(
            f"l-resistor-{text(h).replace('.', 'p')}", f"L-shaped resistor, arms 1 wide and {text(h)} long outside, electrodes on both ends: resistance",
            f"L with the outer corner at the origin and arms of outer length {text(h)}",
            points([(0, 0), (h, 0), (h, 1), (1, 1), (1, h), (0, h)]), [mp.mpf(a) / 2 for a in (1, 1, 1, 3, 1, 1)],
            {"kind": "resistance", "multiplier": "1"}, value, limit, digits,
            "R=2 K(r)/K(r'), r=((t1-t2)/(t1+t2))^2, t1=mu^-1(pi/2c), t2=mu^-1(pi c/2), c=2h-1, mu(r)=(pi/2)K(r')/K(r)",
            "trapezium after Burnside 1893 and Bowman 1953; polygonal resistors after Trefethen 1984 (from memory)",
            check, held={1: "1", 4: "0"},
        )


if __name__ == "__main__":
    triangles()
    rectangles()
    regular_polygons()
    three_square_l()
    plus_shapes()
    l_resistors()
    about = {
        "quantity": "Published Schwarz-Christoffel examples with closed forms",
        "units": "dimensionless: unit conductivity and the held values listed; lengths in the unit of the section",
        "orientation": "as in the other case files; see README.md",
        "digits": "25 significant digits, computed with mpmath by published_maps.py",
    }
    dump("published-maps.json", {"about": about, "cases": [with_sensitivity(c, as_read=c["id"].startswith("triangle-")) for c in CASES]})
    for c in CASES:
        print(c["id"], c["value"], c["cross_check"])
