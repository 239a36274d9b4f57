//! A layered fabric: the stretch that makes its field a potential, and the outline in stretched coordinates.
//!
//! With conductivities `k_u` along the layers and `k_v` across them, and coordinates `u`, `v` along and across,
//!
//! ```text
//! k_u φ_uu + k_v φ_vv = 0,    u' = a u,  v' = b v,   b/a = √(k_u/k_v),   a b = 1:    φ_u'u' + φ_v'v' = 0
//! flux = ∫ k_u φ_u dv − k_v φ_v du = √(k_u k_v) ∫ φ_u' dv' − φ_v' du'
//! ```
//! so the stretched section, of the same area, conducts alike in all directions with `k = √(k_u k_v)`, and every
//! flux is the true one (Samsioe 1931; Muskat 1937, from memory). In x and y the stretch is a symmetric matrix `M`
//! with the layers as one principal direction: `z' = M z`, `∇φ = M ∇'φ`.

use super::faults::{OutlineFaults, OutlineWarning, VertexIdx};
use super::{MAX_HEADING, Outline, Point, Vertex, heading};
use thiserror::Error;

/// Largest ratio of the conductivities along and across, either way. The coordinates across are then stretched a
/// thousand times as much as those along, and their rounding with them; no material is known that comes near.
pub const MAX_CONTRAST: f64 = 1e6;

/// A fabric of thin parallel layers.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fabric {
    /// Conductivity along the layers, above zero.
    pub along: f64,
    /// Conductivity across the layers, above zero.
    pub across: f64,
    /// Direction of the layers in degrees, counter-clockwise from the x axis.
    pub dip: f64,
}

/// Why a fabric, or a section of it, cannot be stretched.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum FabricFault {
    /// A conductivity that is none.
    #[error("the conductivity {direction} the layers is {value}; it must be finite and above zero")]
    Conductivity {
        /// `along` or `across`.
        direction: &'static str,
        /// What was given.
        value: f64,
    },
    /// A dip that is no direction.
    #[error("the dip of the layers is {dip} degrees; it must be between -{limit} and {limit}")]
    Dip {
        /// What was given.
        dip: f64,
        /// [`MAX_HEADING`].
        limit: f64,
    },
    /// Conductivities too far apart.
    #[error("the conductivities along and across the layers differ {contrast:e} times, more than {limit:e}")]
    Contrast {
        /// The larger over the smaller.
        contrast: f64,
        /// [`MAX_CONTRAST`].
        limit: f64,
    },
    /// A gap or a side that is too small a part of the stretched section.
    #[error("stretched for its layered fabric, the section is so long that vertex {} meets another part of it", .vertex.0)]
    DetailLost {
        /// The vertex that moved.
        vertex: VertexIdx,
    },
    /// The stretched outline breaks a rule that the true one keeps.
    #[error(
        "stretched for its layered fabric, the section breaks a rule (coordinates are stretched ones): {0}"
    )]
    Unsound(OutlineFaults),
}

impl Fabric {
    /// The conductivity of the stretched section, `√(along · across)`.
    pub fn conductivity(&self) -> f64 {
        // Root by root: the product could overflow.
        self.along.sqrt() * self.across.sqrt()
    }

    /// The stretch that makes the fabric conduct alike in all directions.
    ///
    /// # Errors
    /// A conductivity that is not finite and positive, a contrast above [`MAX_CONTRAST`], a dip that is no angle.
    ///
    /// # Examples
    /// ```
    /// use sc_core::outline::{Fabric, Point};
    ///
    /// let stretch = Fabric { along: 16.0, across: 1.0, dip: 0.0 }.stretch()?;
    /// assert_eq!(stretch.to_stretched(Point::new(2.0, 3.0)), Point::new(1.0, 6.0));
    /// # Ok::<(), sc_core::outline::FabricFault>(())
    /// ```
    pub fn stretch(&self) -> Result<Stretch, FabricFault> {
        let Self { along, across, dip } = *self;
        for (direction, value) in [("along", along), ("across", across)] {
            if !(value.is_finite() && value > 0.0) {
                return Err(FabricFault::Conductivity { direction, value });
            }
        }
        if !(dip.is_finite() && dip.abs() <= MAX_HEADING) {
            return Err(FabricFault::Dip { dip, limit: MAX_HEADING });
        }
        let contrast = along.max(across) / along.min(across);
        if contrast.is_nan() || contrast > MAX_CONTRAST {
            return Err(FabricFault::Contrast { contrast, limit: MAX_CONTRAST });
        }
        if contrast <= 1.0 {
            return Ok(Stretch::NONE);
        }
        let factor = (along / across).sqrt().sqrt();
        let dip = heading::reduce(dip);
        let origin = Point::new(0.0, 0.0);
        Ok(Stretch { dip, layers: heading::unit(dip), origin, factors: Some((1.0 / factor, factor)) })
    }
}

/// A stretch of the plane along and across layers that keeps areas.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stretch {
    dip: f64,
    /// Unit vector along the layers.
    layers: Point,
    /// The point that has the image zero.
    origin: Point,
    /// Factors of lengths along and across the layers; `None` leaves every bit as it is.
    factors: Option<(f64, f64)>,
}

impl Stretch {
    /// No stretch at all.
    pub const NONE: Stretch =
        Stretch { dip: 0.0, layers: Point::new(1.0, 0.0), origin: Point::new(0.0, 0.0), factors: None };

    /// The same stretch with another point, a vertex of the section, that has the image zero. Far from the origin the
    /// differences of coordinates are exact, and rounding of the coordinates themselves would be multiplied.
    #[must_use]
    pub fn about(self, origin: Point) -> Stretch {
        if self.is_none() { self } else { Stretch { origin, ..self } }
    }

    /// Whether nothing is stretched.
    pub fn is_none(&self) -> bool {
        self.factors.is_none()
    }

    /// Factors of lengths along and across the layers; their product is 1.
    pub fn factors(&self) -> (f64, f64) {
        self.factors.unwrap_or((1.0, 1.0))
    }

    /// The largest factor of a length in any direction.
    pub fn largest_factor(&self) -> f64 {
        let (along, across) = self.factors();
        along.max(across)
    }

    /// The image of a point.
    pub fn to_stretched(&self, z: Point) -> Point {
        let Some((along, across)) = self.factors else { return z };
        self.scaled(z - self.origin, along, across)
    }

    /// The point with a given image.
    pub fn to_true(&self, z: Point) -> Point {
        let Some((along, across)) = self.factors else { return z };
        self.scaled(z, 1.0 / along, 1.0 / across) + self.origin
    }

    /// The gradient in true coordinates of a potential whose gradient in stretched ones is given.
    pub fn gradient_to_true(&self, gradient: Point) -> Point {
        // M is symmetric: it maps gradients back as it maps points forth.
        let Some((along, across)) = self.factors else { return gradient };
        self.scaled(gradient, along, across)
    }

    /// The factor of lengths along a unit vector.
    pub fn lengthening(&self, direction: Point) -> f64 {
        match self.factors {
            Some((along, across)) => self.scaled(direction, along, across).norm(),
            None => 1.0,
        }
    }

    /// The heading of the image of a direction, in degrees; less than a quarter turn from it, on the same side of
    /// the layers and of the normal to them.
    pub fn heading_to_stretched(&self, degrees: f64) -> f64 {
        degrees + self.turned(degrees)
    }

    /// How far the image of a direction is turned, in degrees.
    fn turned(&self, degrees: f64) -> f64 {
        let Some((along, across)) = self.factors else { return 0.0 };
        let from_layers = heading::reduce(heading::reduce(degrees) - self.dip);
        // Opposite headings turn alike.
        let t = if from_layers >= 180.0 { from_layers - 180.0 } else { from_layers };
        let d = heading::unit(t);
        if d.re.abs() <= 0.0 || d.im.abs() <= 0.0 {
            return 0.0;
        }
        (across * d.im).atan2(along * d.re).to_degrees() - t
    }

    fn scaled(&self, z: Point, along: f64, across: f64) -> Point {
        // Layers along an axis leave the other coordinate out of the sum.
        let w = z * self.layers.conj();
        Point::new(along * w.re, across * w.im) * self.layers
    }
}

impl Outline {
    /// The same outline in stretched coordinates, with the same numbers of vertices and sides.
    ///
    /// Points that are one stay one, and parallel sides to infinity stay parallel.
    ///
    /// # Errors
    /// [`FabricFault::DetailLost`] or [`FabricFault::Unsound`] if it is stretched beyond what the rules of an outline
    /// allow.
    pub fn stretched(&self, stretch: &Stretch) -> Result<Outline, FabricFault> {
        if stretch.is_none() {
            return Ok(self.clone());
        }
        let n = self.n();
        let mut given = self.vertices.clone();
        for (k, &vertex) in self.vertices.iter().enumerate() {
            given[self.given_vertex(k).0] = vertex;
        }
        let mut turns = Turns { stretch, known: Vec::new() };
        for vertex in &mut given {
            *vertex = match *vertex {
                Vertex::At(z) => Vertex::At(stretch.to_stretched(z)),
                Vertex::Away { arriving, leaving } => {
                    Vertex::Away { arriving: turns.heading(arriving), leaving: turns.heading(leaving) }
                }
            };
        }
        let found = Outline::new(&given).map_err(FabricFault::Unsound)?;
        let outline = found.value;
        let magnitude = |p: Point| p.re.abs().max(p.im.abs());
        let farthest = given.iter().filter_map(Vertex::point).map(magnitude).fold(0.0, f64::max);
        let (along, across) = stretch.factors();
        let rounding = 64.0 * f64::EPSILON * farthest * (along / across).max(across / along);
        for warning in &found.warnings {
            match *warning {
                OutlineWarning::VertexMovedToVertex { vertex, .. } => {
                    return Err(FabricFault::DetailLost { vertex });
                }
                OutlineWarning::VertexMovedToSide { vertex, distance, .. } if distance > rounding => {
                    return Err(FabricFault::DetailLost { vertex });
                }
                _ => {}
            }
        }
        // Vertices may also have met within rounding, which is not warned of.
        let met = (0..n).find(|&k| {
            let (before, after) = (self.point(k), outline.point(k));
            (0..k).any(|j| self.point(j) != before && outline.point(j) == after && after.is_some())
        });
        match met {
            Some(k) => Err(FabricFault::DetailLost { vertex: self.given_vertex(k) }),
            None if outline.reversed() != self.reversed() => {
                Err(FabricFault::DetailLost { vertex: self.given_vertex(0) })
            }
            None => Ok(outline),
        }
    }
}

/// Headings that were stretched, so that parallel ones turn by the same bits.
struct Turns<'a> {
    stretch: &'a Stretch,
    /// Headings, and how far they turned.
    known: Vec<(f64, f64)>,
}

impl Turns<'_> {
    fn heading(&mut self, degrees: f64) -> f64 {
        let parallel = |h: f64| {
            let apart = heading::apart(heading::reduce(h), heading::reduce(degrees));
            apart.min((180.0 - apart).abs()) <= heading::rounding(degrees).max(heading::rounding(h))
        };
        if let Some(&(h, turned)) = self.known.iter().find(|&&(h, _)| parallel(h)) {
            // Rounding of a heading would be stretched as well: this one is the other's but for half turns.
            let half_turns = ((degrees - h) / 180.0).round();
            return h + 180.0 * half_turns + turned;
        }
        let turned = self.stretch.turned(degrees);
        self.known.push((degrees, turned));
        degrees + turned
    }
}

#[cfg(test)]
mod tests {
    #![expect(clippy::float_cmp, reason = "what is not stretched keeps its bits")]

    use super::*;

    fn stretch(along: f64, across: f64, dip: f64) -> Stretch {
        Fabric { along, across, dip }.stretch().unwrap()
    }

    #[test]
    fn alike_in_all_directions_every_bit_is_kept() {
        let s = stretch(3e-7, 3e-7, 33.3);
        let z = Point::new(0.1, -7.3);
        assert!(s.is_none());
        assert_eq!((s.to_stretched(z), s.to_true(z), s.gradient_to_true(z)), (z, z, z));
        assert_eq!(s.heading_to_stretched(123.4), 123.4);
    }

    #[test]
    fn nine_and_four_conduct_as_six() {
        // The worked value of a seepage handbook (recalled): kx = 9, kz = 4 (1e-7 m/s) give k' = 6.
        assert_eq!(Fabric { along: 9.0, across: 4.0, dip: 0.0 }.conductivity(), 6.0);
        let (along, across) = stretch(9.0, 4.0, 0.0).factors();
        assert!((across / along - 1.5).abs() < 1e-15 && (along * across - 1.0).abs() < 1e-15);
    }

    #[test]
    fn layers_along_an_axis_stretch_each_coordinate_by_itself() {
        for (dip, want) in [(0.0, (1.0, 6.0)), (90.0, (4.0, 1.5)), (180.0, (1.0, 6.0)), (-90.0, (4.0, 1.5))] {
            let image = stretch(16.0, 1.0, dip).to_stretched(Point::new(2.0, 3.0));
            assert_eq!((image.re, image.im), want, "dip {dip}");
        }
    }

    #[test]
    fn points_return_and_gradients_keep_directional_derivatives() {
        let mut seen = 0;
        for (along, across, dip) in [(9.0, 4.0, 30.0), (1.0, 50.0, -71.0), (2e-5, 1e-7, 205.0)] {
            let s = stretch(along, across, dip);
            let (z, g) = (Point::new(0.7, -1.9), Point::new(-0.4, 0.3));
            assert!((s.to_true(s.to_stretched(z)) - z).norm() < 1e-14 * s.largest_factor().powi(2));
            // ∇φ · dz = ∇'φ · dz'
            let dot = |a: Point, b: Point| a.re * b.re + a.im * b.im;
            let (one, other) = (dot(s.gradient_to_true(g), z), dot(g, s.to_stretched(z)));
            assert!((one - other).abs() < 1e-14 * s.largest_factor());
            seen += 1;
        }
        assert_eq!(seen, 3);
    }

    #[test]
    fn a_section_far_away_is_stretched_as_one_at_the_origin() {
        let fabric = Fabric { along: 1e6, across: 1.0, dip: 30.0 };
        let (far, z) = (Point::new(65536.0, -131_072.0), Point::new(0.75, -0.5));
        let (near, away) = (fabric.stretch().unwrap(), fabric.stretch().unwrap().about(far));
        assert_eq!(away.to_stretched(far + z), near.to_stretched(z));
        assert!((away.to_true(away.to_stretched(far + z)) - (far + z)).norm() < 1e-10);
        assert_eq!(away.gradient_to_true(z), near.gradient_to_true(z));
        assert_eq!(away.lengthening(Point::new(0.6, 0.8)), near.lengthening(Point::new(0.6, 0.8)));
        assert!(Stretch::NONE.about(far).is_none());
    }

    #[test]
    fn headings_are_those_of_image_directions_and_opposite_ones_stay_opposite() {
        let mut seen = 0;
        for (contrast, dip) in [(9.0, 30.0), (0.01, 75.0), (1e6, -140.0)] {
            let s = stretch(contrast, 1.0, dip);
            for step in -18..36 {
                let degrees = 20.0 * f64::from(step) + 1.0;
                let image = s.to_stretched(heading::unit(degrees));
                let computed = heading::unit(s.heading_to_stretched(degrees));
                let off = (computed - image / image.norm()).norm();
                assert!(off < 1e-14 * s.largest_factor().powi(2), "{contrast} {dip} {degrees}: {off:e}");
                let turn = s.heading_to_stretched(degrees + 180.0) - s.heading_to_stretched(degrees);
                assert!((turn - 180.0).abs() < 1e-10 * s.largest_factor(), "{turn}");
                seen += 1;
            }
            for k in 0..4 {
                let principal = dip + 90.0 * f64::from(k);
                assert_eq!(s.heading_to_stretched(principal), principal);
            }
        }
        assert_eq!(seen, 162);
    }

    #[test]
    fn a_dipping_channel_stays_a_channel_with_a_wall() {
        // A channel toward 20.1 and 200.1 degrees: the opposite heading is not the exact sum.
        let d = heading::unit(20.1);
        let normal = d * Point::new(0.0, 1.0);
        let vertices = [
            Vertex::away(20.1),
            Vertex::At(normal),
            Vertex::At(normal * 0.5),
            Vertex::At(normal * 0.25),
            Vertex::At(normal * 0.5),
            Vertex::At(normal),
            Vertex::away(200.1),
            Vertex::At(Point::new(0.0, 0.0)),
        ];
        let outline = Outline::new(&vertices).unwrap().value;
        for contrast in [0.001, 9.0, 1e6] {
            let stretched = outline.stretched(&stretch(contrast, 1.0, 47.0)).unwrap();
            let alpha = stretched.alpha();
            assert_eq!((alpha[0], alpha[6], alpha[3]), (0.0, 0.0, 2.0), "{contrast}");
            let sum: f64 = alpha.iter().sum();
            assert!((sum - 6.0).abs() < 1e-12, "{sum}");
            assert_eq!(stretched.point(2), stretched.point(4));
        }
    }

    #[test]
    fn reversed_lists_keep_their_numbers() {
        let clockwise = [(0.0, 0.0), (0.0, 1.0), (2.0, 1.0), (2.0, 0.0)].map(|(x, y)| Vertex::at(x, y));
        let outline = Outline::new(&clockwise).unwrap().value;
        let s = stretch(5.0, 1.0, 25.0);
        let stretched = outline.stretched(&s).unwrap();
        assert!(stretched.reversed());
        for k in 0..4 {
            assert_eq!(stretched.point(k), outline.point(k).map(|z| s.to_stretched(z)));
            assert_eq!(stretched.given_side(k), outline.given_side(k));
        }
    }

    #[test]
    fn a_gap_that_the_stretch_would_close_is_refused() {
        let points = [(0.0, 0.0), (1.0, 0.0), (1.0, 5e-7), (0.0, 5e-7)].map(|(x, y)| Vertex::at(x, y));
        let outline = Outline::new(&points).unwrap().value;
        let fault = outline.stretched(&stretch(1.0, 1e6, 0.0)).unwrap_err();
        assert!(matches!(fault, FabricFault::Unsound(_) | FabricFault::DetailLost { .. }), "{fault}");
        assert!(outline.stretched(&stretch(1e6, 1.0, 0.0)).is_ok());
    }

    #[test]
    fn what_is_no_fabric_is_refused() {
        for (along, across, dip) in [
            (0.0, 1.0, 0.0),
            (1.0, -1.0, 0.0),
            (f64::NAN, 1.0, 0.0),
            (1.0, f64::INFINITY, 0.0),
            (1.0, 1.0, f64::NAN),
            (1.0, 1.0, 1e9),
            (1.1e6, 1.0, 0.0),
            (1e-300, 1e300, 0.0),
        ] {
            assert!(Fabric { along, across, dip }.stretch().is_err(), "{along} {across} {dip}");
        }
    }
}
