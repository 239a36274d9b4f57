//! A page as SVG and as PNG. Both back ends take whole numbers of pixels, so both draw on a finer grid than asked
//! for: the SVG is scaled back by its view box, the bitmap by averaging, which also smooths its edges.

use super::drawing::{Align, Drawing, Lettering, Mark, PagePoint, Pen, dashes};
use plotters::backend::{BitMapBackend, DrawingBackend, SVGBackend};
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{Color, FontFamily, FontStyle, RGBColor, ShapeStyle, TextStyle, register_font};
use std::sync::OnceLock;
use thiserror::Error;

/// A sans-serif font (`DejaVu Sans`), cut to Latin, Greek and mathematical signs.
static FONT: &[u8] = include_bytes!("../../assets/DejaVuSans-subset.ttf");
/// Parts of a pixel in an SVG.
const SVG_GRID: f64 = 20.0;
/// Parts of a pixel, along one edge, that are averaged in a bitmap, and the most that a whole page may have.
const MAX_SAMPLES: u32 = 4;
const MAX_GRID: u64 = 16_000_000;
/// Largest edge of a page in pixels.
pub(crate) const MAX_EDGE: u32 = 12_000;
/// The back ends' size of a text, over its em: for SVG a constant of the back end, for bitmaps the height of the font.
const SVG_SIZE: f64 = 1.24;
const BITMAP_SIZE: f64 = 1.164;
/// Height above the base line, in em, of the point that a back end puts a text at: for SVG half of an x in general
/// fonts, for bitmaps half its size.
const SVG_RISE: f64 = 0.26;
const BITMAP_RISE: f64 = 0.5 * BITMAP_SIZE;

/// Why a page cannot be written.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum RenderError {
    /// The page is larger than can be drawn.
    #[error("a figure of {width} by {height} pixels is larger than {MAX_EDGE} on an edge")]
    TooLarge {
        /// Its width.
        width: u32,
        /// Its height.
        height: u32,
    },
    /// The back end refused.
    #[error("the figure could not be drawn: {reason}")]
    BackEnd {
        /// What it says.
        reason: String,
    },
}

fn back_end(e: impl std::fmt::Display) -> RenderError {
    RenderError::BackEnd { reason: e.to_string() }
}

/// Registers the font once; whether it could be read.
fn font_ready() -> bool {
    static READY: OnceLock<bool> = OnceLock::new();
    *READY.get_or_init(|| register_font("sans-serif", FontStyle::Normal, FONT).is_ok())
}

fn text_style(size: f64, tone: f64, align: Align, v_pos: VPos) -> TextStyle<'static> {
    let h_pos = match align {
        Align::Start => HPos::Left,
        Align::Middle => HPos::Center,
        Align::End => HPos::Right,
    };
    let mut style = TextStyle::from((FontFamily::SansSerif, size));
    style.color = grey(tone).to_backend_color();
    style.pos = Pos::new(h_pos, v_pos);
    style
}

fn grey(tone: f64) -> RGBColor {
    let v = (255.0 * tone.clamp(0.0, 1.0)).round() as u8;
    RGBColor(v, v, v)
}

/// Width of a text in pixels, in the embedded font.
pub(crate) fn text_width(text: &str, size: f64) -> f64 {
    // The back end counts whole pixels: measure at a hundredfold size.
    let style = text_style(100.0 * BITMAP_SIZE * size, 0.0, Align::Start, VPos::Top);
    let measured = if font_ready() { style.font.layout_box(text).ok() } else { None };
    measured.map_or(0.6 * size * text.chars().count() as f64, |(_, (width, _))| f64::from(width) / 100.0)
}

/// What differs between the back ends.
struct Grid {
    scale: f64,
    bitmap: bool,
}

impl Grid {
    fn point(&self, p: PagePoint) -> (i32, i32) {
        // Saturates: a page has at most MAX_EDGE pixels on an edge.
        ((p[0] * self.scale).round() as i32, (p[1] * self.scale).round() as i32)
    }

    fn draw<B: DrawingBackend>(&self, back: &mut B, drawing: &Drawing) -> Result<(), RenderError> {
        for mark in &drawing.marks {
            match mark {
                Mark::Line(points, pen) => match pen.dash {
                    None => self.line(back, points, *pen)?,
                    Some(dash) => {
                        dashes(points, dash).iter().try_for_each(|part| self.line(back, part, *pen))?;
                    }
                },
                Mark::Area(points, tone) => {
                    let points: Vec<_> = points.iter().map(|p| self.point(*p)).collect();
                    back.fill_polygon(points, &grey(*tone).filled()).map_err(back_end)?;
                }
                Mark::Text(text) => self.text(back, text)?,
            }
        }
        back.present().map_err(back_end)
    }

    fn line<B: DrawingBackend>(&self, back: &mut B, line: &[PagePoint], pen: Pen) -> Result<(), RenderError> {
        let mut points: Vec<_> = line.iter().map(|p| self.point(*p)).collect();
        points.dedup();
        if points.len() < 2 {
            return Ok(());
        }
        let stroke_width = (pen.width * self.scale).round().max(1.0) as u32;
        let style = ShapeStyle { color: grey(pen.tone).to_rgba(), filled: false, stroke_width };
        back.draw_path(points, &style).map_err(back_end)
    }

    fn text<B: DrawingBackend>(&self, back: &mut B, text: &Lettering) -> Result<(), RenderError> {
        let (size, v_pos, rise) = if self.bitmap {
            (BITMAP_SIZE, VPos::Top, BITMAP_RISE)
        } else {
            (SVG_SIZE, VPos::Center, SVG_RISE)
        };
        let style = text_style(text.size * size * self.scale, 0.0, text.align, v_pos);
        let at = self.point([text.at[0], text.at[1] - rise * text.size]);
        back.draw_text(&text.text, &style, at).map_err(back_end)
    }
}

impl Drawing {
    fn check(&self) -> Result<(), RenderError> {
        let (width, height) = (self.width, self.height);
        if width > MAX_EDGE || height > MAX_EDGE || width == 0 || height == 0 {
            return Err(RenderError::TooLarge { width, height });
        }
        if font_ready() { Ok(()) } else { Err(back_end("the embedded font cannot be read")) }
    }

    /// The page as SVG. Texts stay texts, in the reader's sans-serif font.
    ///
    /// # Errors
    /// [`RenderError`] if the page is too large.
    pub fn to_svg(&self) -> Result<String, RenderError> {
        self.check()?;
        let grid = Grid { scale: SVG_GRID, bitmap: false };
        let fine = |edge: u32| edge * SVG_GRID as u32;
        let mut svg = String::new();
        {
            let mut back = SVGBackend::with_string(&mut svg, (fine(self.width), fine(self.height)));
            grid.draw(&mut back, self)?;
        }
        let wide = format!("width=\"{}\" height=\"{}\"", fine(self.width), fine(self.height));
        let asked = format!("width=\"{}\" height=\"{}\"", self.width, self.height);
        Ok(svg.replacen(&wide, &asked, 1))
    }

    /// The page as PNG in 256 shades of grey.
    ///
    /// # Errors
    /// [`RenderError`] if the page is too large.
    pub fn to_png(&self) -> Result<Vec<u8>, RenderError> {
        self.check()?;
        let pixels = u64::from(self.width) * u64::from(self.height);
        let samples = (1..=MAX_SAMPLES).rev().find(|&s| pixels * u64::from(s * s) <= MAX_GRID).unwrap_or(1);
        let (width, height) = (self.width * samples, self.height * samples);
        let mut fine = vec![255_u8; width as usize * height as usize * 3];
        {
            let grid = Grid { scale: f64::from(samples), bitmap: true };
            let mut back = BitMapBackend::with_buffer(&mut fine, (width, height));
            grid.draw(&mut back, self)?;
        }
        let grey = self.averaged(&fine, samples as usize);
        let mut png = Vec::new();
        let mut encoder = png::Encoder::new(&mut png, self.width, self.height);
        encoder.set_color(png::ColorType::Grayscale);
        encoder.set_depth(png::BitDepth::Eight);
        encoder.write_header().and_then(|mut writer| writer.write_image_data(&grey)).map_err(back_end)?;
        Ok(png)
    }

    /// Means over squares of the fine grid; everything drawn is grey, so one channel says all.
    fn averaged(&self, fine: &[u8], samples: usize) -> Vec<u8> {
        let (width, height) = (self.width as usize, self.height as usize);
        let count = samples * samples;
        (0..height * width)
            .map(|i| {
                let (row, column) = (i / width * samples, i % width * samples);
                let sum: usize = (0..samples)
                    .flat_map(|r| (0..samples).map(move |c| (row + r, column + c)))
                    .map(|(r, c)| usize::from(fine[(r * width * samples + c) * 3]))
                    .sum();
                ((sum + count / 2) / count) as u8
            })
            .collect()
    }
}
