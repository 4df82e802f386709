//! One figure: curves, bands and marked lines on axes, with the legend in a panel of its own so that
//! it can never cover a curve.

use crate::error::{Error, Result};
use plotters::backend::SVGBackend;
use plotters::chart::ChartBuilder;
use plotters::coord::Shift;
use plotters::drawing::{DrawingArea, IntoDrawingArea};
use plotters::element::{Circle, PathElement, Polygon, Rectangle, Text};
use plotters::series::DashedLineSeries;
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{
    BLACK, Color, FontDesc, FontFamily, FontStyle, IntoTextStyle, RGBColor, ShapeStyle, TextStyle, WHITE,
};

/// Colours that people with any kind of colour vision can tell apart (Okabe and Ito's set without
/// yellow, which is too pale for a line).
pub const COLOURS: [(u8, u8, u8); 7] =
    [(0, 114, 178), (213, 94, 0), (0, 158, 115), (204, 121, 167), (230, 159, 0), (86, 180, 233), (0, 0, 0)];

/// Grey, for legend entries that are about a line style and for marked lines.
pub const GREY: (u8, u8, u8) = (90, 90, 90);

/// How a curve is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stroke {
    /// A full line.
    Full,
    /// Long dashes.
    Dashed,
    /// Short dashes.
    Dotted,
    /// A full line with a dot at every point.
    Marked,
    /// Dots only.
    Dots,
}

/// One curve.
#[derive(Clone, Debug)]
pub struct Curve {
    /// The points, ascending in x.
    pub points: Vec<(f64, f64)>,
    /// Colour.
    pub colour: (u8, u8, u8),
    /// Stroke.
    pub stroke: Stroke,
    /// Half-widths of a band around the curve, if it has one (as many as points).
    pub band: Vec<f64>,
}

/// One line of the legend.
#[derive(Clone, Debug)]
pub struct Entry {
    /// What it says.
    pub text: String,
    /// Colour and stroke of the sample.
    pub sample: Option<((u8, u8, u8), Stroke)>,
}

/// A line across the figure with words beside it.
#[derive(Clone, Debug)]
pub enum Mark {
    /// At this x.
    Vertical(f64, String),
    /// At this y.
    Horizontal(f64, String),
}

/// A figure.
#[derive(Clone, Debug)]
pub struct Figure {
    /// Above the axes.
    pub title: String,
    /// Below the x axis.
    pub x_label: String,
    /// Beside the y axis.
    pub y_label: String,
    /// Range of x.
    pub x: (f64, f64),
    /// Range of y.
    pub y: (f64, f64),
    /// Whether x takes integers only.
    pub integers: bool,
    /// Curves.
    pub curves: Vec<Curve>,
    /// Marked lines.
    pub marks: Vec<Mark>,
    /// Legend.
    pub legend: Vec<Entry>,
}

/// Units per pixel: the library places points on whole units, so a fine grid keeps curves smooth.
const FINE: u32 = 4;
const WIDTH: u32 = 960 * FINE;
const HEIGHT: u32 = 600 * FINE;
const PANEL: u32 = 250 * FINE;

/// The figure as SVG text.
///
/// # Errors
/// The drawing library failed.
pub fn render(figure: &Figure) -> Result<String> {
    let mut text = String::new();
    {
        let root = SVGBackend::with_string(&mut text, (WIDTH, HEIGHT)).into_drawing_area();
        draw(&root, figure).map_err(|cause| {
            Error::input(format!(
                "the figure \"{}\" cannot be drawn: {cause}; choose other states or ranges",
                figure.title
            ))
        })?;
    }
    let (fine, size) = (
        format!("width=\"{WIDTH}\" height=\"{HEIGHT}\""),
        format!("width=\"{}\" height=\"{}\"", WIDTH / FINE, HEIGHT / FINE),
    );
    Ok(text
        .replacen(&fine, &size, 1)
        .replace("font-family=\"sans-serif\"", "font-family=\"DejaVu Sans, Verdana, sans-serif\""))
}

type Failure = Box<dyn std::error::Error>;

fn style(size: u32) -> TextStyle<'static> {
    FontDesc::new(FontFamily::SansSerif, f64::from(size * FINE), FontStyle::Normal)
        .into_text_style(&(WIDTH, HEIGHT))
        .color(&BLACK)
}

fn px(pixels: i32) -> i32 {
    pixels * FINE as i32
}

fn rgb((r, g, b): (u8, u8, u8)) -> RGBColor {
    RGBColor(r, g, b)
}

fn draw(root: &DrawingArea<SVGBackend, Shift>, figure: &Figure) -> std::result::Result<(), Failure> {
    root.fill(&WHITE)?;
    let (left, panel) = root.split_horizontally(WIDTH - PANEL);
    let centred = style(19).pos(Pos::new(HPos::Center, VPos::Top));
    left.draw(&Text::new(figure.title.clone(), ((WIDTH - PANEL) as i32 / 2 + px(30), px(14)), centred))?;
    let mut chart = ChartBuilder::on(&left)
        .margin_top(px(48))
        .margin_bottom(px(12))
        .margin_left(px(12))
        .margin_right(px(14))
        .x_label_area_size(px(48))
        .y_label_area_size(px(76))
        .build_cartesian_2d(figure.x.0..figure.x.1, figure.y.0..figure.y.1)?;
    let x_step = figure.x.1 - figure.x.0;
    let y_step = figure.y.1 - figure.y.0;
    let integers = figure.integers;
    let x_text = move |x: &f64| if integers { integer(*x) } else { tick(*x, x_step) };
    let y_text = move |y: &f64| tick(*y, y_step);
    let x_labels = if integers { (x_step as usize).clamp(2, 20) } else { 9 };
    chart
        .configure_mesh()
        .x_desc(figure.x_label.clone())
        .y_desc(figure.y_label.clone())
        .x_labels(x_labels)
        .y_labels(9)
        .x_label_formatter(&x_text)
        .y_label_formatter(&y_text)
        .label_style(style(15))
        .axis_desc_style(style(17))
        .axis_style(BLACK.stroke_width(FINE))
        .set_all_tick_mark_size(px(5))
        .bold_line_style(RGBColor(225, 225, 225).stroke_width(FINE))
        .light_line_style(WHITE)
        .draw()?;
    for curve in figure.curves.iter().filter(|curve| !curve.band.is_empty()) {
        let limit = |y: f64| y.clamp(figure.y.0, figure.y.1);
        let upper = curve.points.iter().zip(&curve.band).map(|(&(x, y), e)| (x, limit(y + e)));
        let lower = curve.points.iter().zip(&curve.band).map(|(&(x, y), e)| (x, limit(y - e)));
        let outline: Vec<(f64, f64)> = upper.chain(lower.rev()).collect();
        chart.draw_series(std::iter::once(Polygon::new(outline, rgb(curve.colour).mix(0.18).filled())))?;
    }
    for mark in &figure.marks {
        let (ends, words) = match mark {
            Mark::Vertical(x, words) => ([(*x, figure.y.0), (*x, figure.y.1)], words),
            Mark::Horizontal(y, words) => ([(figure.x.0, *y), (figure.x.1, *y)], words),
        };
        let line = ShapeStyle::from(&rgb(GREY)).stroke_width(FINE);
        chart.draw_series(DashedLineSeries::new(ends, px(8), px(4), line))?;
        let place = match mark {
            Mark::Vertical(x, _) => (*x, figure.y.1),
            Mark::Horizontal(y, _) => (figure.x.1, *y),
        };
        let (dx, dy, pos) = match mark {
            Mark::Vertical(x, _) if *x > (figure.x.0 + figure.x.1) / 2.0 => {
                (px(-6), px(6), Pos::new(HPos::Right, VPos::Top))
            }
            Mark::Vertical(..) => (px(6), px(6), Pos::new(HPos::Left, VPos::Top)),
            Mark::Horizontal(..) => (px(-6), px(-4), Pos::new(HPos::Right, VPos::Bottom)),
        };
        let words = words.clone();
        chart.draw_series(std::iter::once(
            plotters::element::EmptyElement::at(place)
                + Text::new(words, (dx, dy), style(14).color(&rgb(GREY)).pos(pos)),
        ))?;
    }
    for curve in &figure.curves {
        for run in clipped(&curve.points, figure.y) {
            let colour = rgb(curve.colour);
            match curve.stroke {
                Stroke::Full | Stroke::Marked => {
                    chart.draw_series(std::iter::once(PathElement::new(run, colour.stroke_width(2 * FINE))))?;
                }
                Stroke::Dots => {}
                Stroke::Dashed => {
                    chart.draw_series(DashedLineSeries::new(run, px(9), px(5), colour.stroke_width(2 * FINE)))?;
                }
                Stroke::Dotted => {
                    chart.draw_series(DashedLineSeries::new(run, px(2), px(4), colour.stroke_width(2 * FINE)))?;
                }
            }
        }
        if matches!(curve.stroke, Stroke::Marked | Stroke::Dots) {
            let inside = curve.points.iter().filter(|point| point.1 >= figure.y.0 && point.1 <= figure.y.1);
            chart.draw_series(inside.map(|&point| Circle::new(point, px(4), rgb(curve.colour).filled())))?;
        }
    }
    legend(&panel, figure)
}

fn legend(panel: &DrawingArea<SVGBackend, Shift>, figure: &Figure) -> std::result::Result<(), Failure> {
    let spacing = (480 / figure.legend.len().max(1) as i32).min(26);
    for (index, entry) in figure.legend.iter().enumerate() {
        let y = px(62 + index as i32 * spacing);
        let mut text_x = px(6);
        if let Some((colour, stroke)) = entry.sample {
            let colour = rgb(colour);
            let segments: Vec<(i32, i32)> = match stroke {
                Stroke::Full | Stroke::Marked => vec![(6, 44)],
                Stroke::Dots => vec![],
                Stroke::Dashed => vec![(6, 15), (20, 29), (34, 43)],
                Stroke::Dotted => (0..7).map(|k| (6 + 6 * k, 8 + 6 * k)).collect(),
            };
            for (from, to) in segments {
                panel.draw(&Rectangle::new([(px(from), y - px(1)), (px(to), y + px(1))], colour.filled()))?;
            }
            if matches!(stroke, Stroke::Marked | Stroke::Dots) {
                panel.draw(&Circle::new((px(25), y), px(4), colour.filled()))?;
            }
            text_x = px(52);
        }
        panel.draw(&Text::new(entry.text.clone(), (text_x, y), style(14).pos(Pos::new(HPos::Left, VPos::Center))))?;
    }
    Ok(())
}

/// The parts of a curve inside the range of y, cut exactly at its borders.
fn clipped(points: &[(f64, f64)], (low, high): (f64, f64)) -> Vec<Vec<(f64, f64)>> {
    let inside = |y: f64| y >= low && y <= high;
    let border = |a: (f64, f64), b: (f64, f64)| {
        let y = if a.1 > high || b.1 > high { high } else { low };
        (a.0 + (b.0 - a.0) * (y - a.1) / (b.1 - a.1), y)
    };
    let mut runs: Vec<Vec<(f64, f64)>> = Vec::new();
    let mut run: Vec<(f64, f64)> = Vec::new();
    for (index, &point) in points.iter().enumerate() {
        let previous = index.checked_sub(1).map(|i| points[i]);
        match (inside(point.1), previous) {
            (true, Some(before)) if !inside(before.1) => run = vec![border(before, point), point],
            (true, _) => run.push(point),
            (false, Some(before)) if inside(before.1) => {
                run.push(border(before, point));
                runs.push(std::mem::take(&mut run));
            }
            (false, _) => {}
        }
    }
    runs.push(run);
    runs.retain(|run| run.len() > 1);
    runs
}

fn integer(x: f64) -> String {
    if (x - x.round()).abs() < 1e-6 { format!("{}", x.round()) } else { String::new() }
}

/// A tick label with as many places as the range calls for.
fn tick(value: f64, range: f64) -> String {
    let places = (1.0 - (range / 5.0).log10().floor()).clamp(0.0, 12.0) as usize;
    let text = format!("{value:.places$}");
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text };
    if text == "-0" { "0".to_string() } else { text }
}

#[cfg(test)]
mod tests {
    use super::{clipped, tick};

    #[test]
    fn curves_end_at_the_border() {
        let points = [(0.0, 0.0), (1.0, 2.0), (2.0, 0.0), (3.0, -2.0), (4.0, 0.5)];
        let runs = clipped(&points, (0.0, 1.0));
        assert_eq!(
            runs,
            [vec![(0.0, 0.0), (0.5, 1.0)], vec![(1.5, 1.0), (2.0, 0.0), (2.0, 0.0)], vec![(3.8, 0.0), (4.0, 0.5)]]
        );
    }

    #[test]
    fn ticks() {
        assert_eq!(tick(0.05, 0.4), "0.05");
        assert_eq!(tick(12.0, 20.0), "12");
        assert_eq!(tick(-0.0, 1.0), "0");
    }
}
