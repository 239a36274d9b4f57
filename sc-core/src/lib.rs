//! Plane potential fields on polygonal sections by Schwarz–Christoffel mapping, with error bounds.
//!
//! A section is a polygon, bounded or reaching to infinity, with walls of no thickness if need be. Each of its sides
//! is held at a level or insulated. Inside, the potential `φ` obeys Laplace's equation:
//!
//! ```text
//! ∇²φ = 0 inside,    φ = level on held sides,    ∂φ/∂n = 0 on insulated sides
//! ```
//! This crate computes and does nothing else: no files, no text, no units. It is meant for whoever needs the shape factor
//! of a section thousands of times, or its field at thousands of points, with a bound on every number.
//!
//! ```
//! use sc_core::answers::{Solution, SolveOptions};
//! use sc_core::outline::{Outline, Vertex};
//! use sc_core::potential::Section;
//!
//! // Three unit squares as an L, from one end to the other: the shape factor is 1/√3.
//! let corners = [(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)];
//! let outline = Outline::new(&corners.map(|(x, y)| Vertex::at(x, y)))?.value;
//! // Side 0 is held by electrode 0 at level 1, side 2 by electrode 1 at level 0.
//! let electrodes = [Some(0), None, Some(1), None, None, None];
//! let (section, _warnings) = Section::new(outline, &electrodes, &[1.0, 0.0]).expect("sound conditions");
//! let solution = Solution::solve(section, &SolveOptions::default())?;
//!
//! let shape_factor = solution.shape_factor().expect("there are two levels");
//! assert!((shape_factor.value - 1.0 / 3.0_f64.sqrt()).abs() <= shape_factor.error);
//! assert!(shape_factor.error < 1e-12);
//!
//! // What enters through side 0 leaves through side 2.
//! let (entering, leaving) = (solution.side_flux(0), solution.side_flux(2));
//! assert!((entering.value - shape_factor.value).abs() <= entering.error + shape_factor.error);
//! assert!((entering.value + leaving.value).abs() <= entering.error + leaving.error);
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
//!
//! # Where to look
//!
//! | for | see |
//! |---|---|
//! | checking a list of vertices, with all faults in its own numbering | [`outline`] |
//! | what holds on each side | [`potential::Section`] |
//! | shape factor, fluxes, matrix, probes, corners | [`answers::Solution`] |
//! | equipotentials and flow lines as polylines | [`answers::FlowNet`] |
//! | the map itself, forward and inverse | [`map::HalfPlaneMap`] |
//! | Gauss–Jacobi rules, the complete elliptic integral | [`quadrature::Rule`], [`potential::complete_k`] |
//!
//! # Conventions
//!
//! *Orientation.* An outline is walked with the section on its left, counter-clockwise if it is bounded. Side `k` leaves
//! vertex `k`. A bounded list that runs the other way is turned round, with a warning; then the *walking index* of a side
//! differs from its number in the list, and [`outline::Outline::given_side`] leads back. [`potential::Section::new`] takes
//! electrodes in the order of the list; everything after that takes and returns walking indices.
//!
//! *Angles.* Interior angles are `π α`: `0 < α ≤ 2` at a finite vertex (1 flat, 2 the tip of a wall), `−2 ≤ α ≤ 0` at one
//! at infinity (0 the end of a channel, −1 that of a half-plane). `Σ α = n − 2`.
//!
//! *Map.* From the upper half-plane, with prevertices `x_1 < … < x_{n−1}` on the real axis and one at infinity. Nothing is
//! normalised beyond that: prevertices are known by the logarithms of their gaps, so that they may crowd without limit.
//!
//! ```text
//! f'(ζ) = C ∏ (ζ − x_k)^{α_k − 1},    0 ≤ arg(ζ − x_k) ≤ π
//! ```
//! *Field.* `W = φ + iψ` is analytic; the gradient is `φ_x − i φ_y = W'(ζ)/f'(ζ)`. The stream function `ψ` is zero at the
//! start of the first held side of the list.
//!
//! *Flux* is for unit conductivity, per unit of run, and positive **into** the section: `∂φ/∂n` with `n` outward, integrated
//! along the side. It is the rise of `ψ` along the side in walking order. Fluxes of all sides sum to zero.
//!
//! *Shape factor* is flux / difference of levels, positive. The *conductance matrix* has in row `r`, column `c` the flux
//! into the section through group `r` with group `c` at 1 and the others at 0: the diagonal is positive, rows and columns
//! sum to zero.
//!
//! *Distance along a side* starts at its first vertex in walking order; on a side that comes from infinity it is measured
//! from its finite end, and negative.
//!
//! *Infinite answers* (the flux between touching sides at different levels, the gradient at a re-entrant corner) are infinite
//! or a variant that says so, never a large number and never `NaN`.
//!
//! # Accuracy
//!
//! By default a section is solved twice by independent means, and every [`answers::Bounded`] carries a bound made from
//! their difference. Shape factors and matrices are right to about 1e-13 where the coordinates allow it: rounding them
//! moves the answer of a long or narrow section more than that, and the bound says so. With
//! [`answers::SolveOptions::check`] off, it takes half the time, and bounds rest on residuals alone. Results do not depend
//! on the number of threads.
//!
//! # Features
//!
//! None. Parallel work goes to the current `rayon` pool.

pub mod answers;
pub mod map;
pub mod outline;
pub mod potential;
pub mod quadrature;

#[cfg(doctest)]
#[doc = include_str!("../../README.md")]
mod readme {}
