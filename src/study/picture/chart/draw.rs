//! Draws a chart.

use super::axis::{Axis, Span};
use super::series::{Look, Series};
use crate::study::picture::ink::{FAMILY, TEXT};
use crate::study::picture::pen::Path;
use crate::study::picture::sheet::{Layer, Sheet, What};
use crate::study::picture::text;
use crate::study::picture::{Ink, PictureError};
use std::fmt::Write;

/// A chart.
///
/// ```
/// use lierne::study::picture::{Axis, Chart, Look, Point, Series};
/// let chart = Chart {
///     x: Axis::linear("length of the interval (sites)"),
///     y: Axis::linear("entropy (legs)"),
///     series: vec![Series::new(
///         "dimension 3",
///         Look::Line,
///         (1..5).map(|l| Point::between(l as f64, (l as f64).ln(), 0.0, 2.0)),
///     )],
///     ..Chart::default()
/// };
/// assert!(chart.draw().unwrap().contains("entropy (legs)"));
/// ```
#[derive(Debug, Clone, PartialEq)]
pub struct Chart {
    /// What it shows, read out by screen readers and written above where `shown`.
    pub title: String,
    /// Whether the title is written above the chart.
    pub shown: bool,
    /// The horizontal axis.
    pub x: Axis,
    /// The vertical axis.
    pub y: Axis,
    /// What is drawn.
    pub series: Vec<Series>,
    /// Colours.
    pub ink: Ink,
    /// Width on paper in millimetres.
    pub width_mm: f64,
    /// Height as a share of the width.
    pub aspect: f64,
    /// Prefix of the ids inside the drawing; give each drawing of one page its own.
    pub id: String,
}

impl Default for Chart {
    fn default() -> Self {
        Self {
            title: String::new(),
            shown: false,
            x: Axis::default(),
            y: Axis::default(),
            series: Vec::new(),
            ink: Ink::Light,
            width_mm: 85.0,
            aspect: 0.66,
            id: "lc".into(),
        }
    }
}

const WIDTH: f64 = 850.0;

/// Where the plot proper lies: left, top, right, bottom.
struct Plot {
    left: f64,
    top: f64,
    right: f64,
    bottom: f64,
    x: Span,
    y: Span,
}

impl Plot {
    fn at(&self, x: f64, y: f64) -> [f64; 2] {
        [
            self.left + self.x.share(x) * (self.right - self.left),
            self.bottom - self.y.share(y) * (self.bottom - self.top),
        ]
    }
    fn holds(&self, p: [f64; 2]) -> bool {
        let s = 0.5;
        p[0] >= self.left - s
            && p[0] <= self.right + s
            && p[1] >= self.top - s
            && p[1] <= self.bottom + s
    }
}

/// Series after the last look begin again.
const LOOKS: usize = 6;

impl Chart {
    /// Draws it as an SVG document, 850 units wide.
    ///
    /// # Errors
    /// [`PictureError::Value`] for numbers that are not finite, or not positive on an axis
    /// by powers of ten.
    pub fn draw(&self) -> Result<String, PictureError> {
        let log = (self.x.scale == super::Scale::Log, self.y.scale == super::Scale::Log);
        for s in &self.series {
            s.check(log)?;
        }
        let mut sheet = Sheet::new(self.ink, &self.id);
        let height = (WIDTH * self.aspect.clamp(0.2, 3.0)).round();
        let mut top = 14.0;
        if self.shown && !self.title.is_empty() {
            sheet.word([8.0, 26.0], "start", "", text::fit(&self.title, TEXT, WIDTH - 16.0));
            top = 44.0;
        }
        top = self.legend(&mut sheet, top);
        let plot = self.frame(&mut sheet, top, height);
        for (k, s) in self.series.iter().enumerate() {
            draw_series(&mut sheet, &plot, s, k % LOOKS, self.bars_shared(k));
        }
        let root = format!("{}chart", self.id);
        let style = style(self.ink, &root, &self.id);
        let desc = format!(
            "{} against {}. {} series, {} points.",
            self.y.label,
            self.x.label,
            self.series.len(),
            self.series.iter().map(|s| s.points.len()).sum::<usize>()
        );
        let title = if self.title.is_empty() {
            format!("{} against {}", self.y.label, self.x.label)
        } else {
            self.title.clone()
        };
        Ok(sheet.write([WIDTH, height], self.width_mm, &root, &style, &title, &desc))
    }
    /// Place of a bar series among the bar series, and how many there are.
    fn bars_shared(&self, k: usize) -> (usize, usize) {
        let bars = |s: &&Series| s.look == Look::Bars;
        let before = self.series[..k].iter().filter(bars).count();
        (before, self.series.iter().filter(bars).count())
    }
    fn legend(&self, sheet: &mut Sheet, top: f64) -> f64 {
        let named: Vec<(usize, &Series)> =
            self.series.iter().enumerate().filter(|s| !s.1.name.is_empty()).collect();
        if named.is_empty() || (named.len() == 1 && self.series.len() == 1) {
            return top;
        }
        let (mut x, mut y) = (14.0, top + 12.0);
        for (k, s) in named {
            let word = text::fit(&s.name, TEXT, WIDTH - 90.0);
            let needs = 52.0 + text::width(&word, TEXT) + 28.0;
            if x + needs > WIDTH && x > 14.0 {
                x = 14.0;
                y += 30.0;
            }
            swatch(sheet, s.look, k % LOOKS, [x, y]);
            sheet.word([x + 52.0, y + 7.5], "start", "", word);
            x += needs;
        }
        y + 24.0
    }
    fn frame(&self, sheet: &mut Sheet, top: f64, height: f64) -> Plot {
        let points = || self.series.iter().flat_map(|s| &s.points);
        let bars = self.series.iter().any(|s| s.look == Look::Bars);
        let ys = points().flat_map(|p| {
            let (a, b) = p.interval.unwrap_or((p.y, p.y));
            [p.y, a, b]
        });
        let y = Span::of(&self.y, ys, bars);
        let half = self.series.iter().filter(|s| s.look == Look::Bars).map(|s| pitch(s) / 2.0);
        let half = half.fold(0.0, f64::max);
        let xs = points().flat_map(|p| [p.x - half, p.x + half]);
        let mut x = Span::of(&self.x, xs, false);
        if half > 0.0 && self.x.range.is_none() && !x.log {
            let xs = || points().map(|p| p.x);
            x.low = xs().fold(f64::INFINITY, f64::min) - half;
            x.high = xs().fold(f64::NEG_INFINITY, f64::max) + half;
            if x.low >= x.high || !x.low.is_finite() {
                (x.low, x.high) = (0.0, 1.0);
            }
        }
        let bottom = height - 14.0 - TEXT * 2.6;
        let y_ticks = y.ticks(((bottom - top) / 75.0).max(2.0) as usize);
        let widest = y_ticks.iter().map(|t| text::width(&t.1, TEXT)).fold(0.0, f64::max);
        let left = 14.0 + TEXT + 14.0 + widest;
        let right = WIDTH - 22.0;
        let plot = Plot { left, top: top + 6.0, right, bottom, x, y };
        let mut grid = Path::new();
        let mut ticks = Path::new();
        for (v, word) in &y_ticks {
            let at = plot.at(x.low, *v);
            grid.move_to([left, at[1]]);
            grid.line_to([right, at[1]]);
            ticks.move_to([left - 6.0, at[1]]);
            ticks.line_to([left, at[1]]);
            sheet.word([left - 11.0, at[1] + TEXT * 0.36], "end", "", word.clone());
        }
        let words = if self.x.words.is_empty() {
            let mut most = 8;
            loop {
                let t = x.ticks(most);
                let wide = t.iter().map(|t| text::width(&t.1, TEXT)).sum::<f64>();
                if most <= 2 || wide + 16.0 * t.len() as f64 <= right - left {
                    break t;
                }
                most -= 1;
            }
        } else {
            self.x.words.clone()
        };
        let room = (right - left) / words.len().max(1) as f64;
        for (v, word) in &words {
            let at = plot.at(*v, y.low);
            if at[0] < left - 1.0 || at[0] > right + 1.0 {
                continue;
            }
            ticks.move_to([at[0], bottom]);
            ticks.line_to([at[0], bottom + 6.0]);
            let word = text::fit(word, TEXT, (room - 6.0).max(30.0));
            let half = text::width(&word, TEXT) / 2.0;
            let cx = at[0].min(WIDTH - 4.0 - half);
            sheet.word([cx, bottom + 8.0 + TEXT], "middle", "", word);
        }
        let mut axes = Path::new();
        axes.move_to([left, plot.top]);
        axes.line_to([left, bottom]);
        axes.line_to([right, bottom]);
        sheet.shape(Layer::Ground, "grid", What::Nothing, grid.into_text());
        sheet.shape(Layer::Wall, "axis", What::Nothing, axes.into_text());
        sheet.shape(Layer::Wall, "axis", What::Nothing, ticks.into_text());
        let label = text::fit(&self.x.label, TEXT, right - left);
        sheet.word([f64::midpoint(left, right), height - 10.0], "middle", "", label);
        let middle = f64::midpoint(plot.top, bottom);
        let label = text::fit(&self.y.label, TEXT, height - 12.0);
        // The label is centred on the axis where it fits there, else on the chart.
        let half = text::width(&label, TEXT) / 2.0;
        let middle = middle.max(half + 4.0).min(height - half - 4.0);
        sheet.turned([12.0 + TEXT * 0.6, middle], "middle", "", label, -90.0);
        plot
    }
}

/// Least distance of neighbouring points, the width of a bar's place.
fn pitch(s: &Series) -> f64 {
    let mut xs: Vec<f64> = s.points.iter().map(|p| p.x).collect();
    xs.sort_by(f64::total_cmp);
    let least =
        xs.windows(2).map(|w| w[1] - w[0]).filter(|d| *d > 0.0).fold(f64::INFINITY, f64::min);
    if least.is_finite() { least } else { 1.0 }
}

fn draw_series(sheet: &mut Sheet, plot: &Plot, s: &Series, k: usize, shared: (usize, usize)) {
    let line = format!("line s{k}");
    let mut bars = Path::new();
    for p in &s.points {
        let Some((a, b)) = p.interval else { continue };
        let clamp = |v: f64| v.clamp(plot.y.low, plot.y.high);
        let (low, high) = (plot.at(p.x, clamp(a.min(b))), plot.at(p.x, clamp(a.max(b))));
        if !plot.holds(low) {
            continue;
        }
        bars.move_to(low);
        bars.line_to(high);
        for end in [low, high] {
            bars.move_to([end[0] - 5.0, end[1]]);
            bars.line_to([end[0] + 5.0, end[1]]);
        }
    }
    sheet.shape(Layer::Rib, &format!("error s{k}"), What::Nothing, bars.into_text());
    if s.look == Look::Bars {
        let wide = pitch(s) * 0.86 / shared.1.max(1) as f64;
        let start = -pitch(s) * 0.43 + wide * shared.0 as f64;
        let base = plot.y.low.max(if plot.y.log { plot.y.low } else { 0.0 }).min(plot.y.high);
        let mut p = Path::new();
        for q in &s.points {
            let top = q.y.clamp(plot.y.low, plot.y.high);
            let (a, b) = (plot.at(q.x + start, base), plot.at(q.x + start + wide, top));
            p.move_to(a);
            p.line_to([a[0], b[1]]);
            p.line_to(b);
            p.line_to([b[0], a[1]]);
            p.close();
        }
        sheet.shape(Layer::Cell, &format!("bar s{k}"), What::Nothing, p.into_text());
        return;
    }
    if s.look != Look::Marks {
        let mut p = Path::new();
        let mut pen_down = false;
        let mut last: Option<[f64; 2]> = None;
        for q in &s.points {
            let at = plot.at(q.x, q.y);
            if !plot.holds(at) {
                pen_down = false;
                continue;
            }
            match (pen_down, last) {
                (true, Some(from)) if s.look == Look::Steps => {
                    p.line_to([at[0], from[1]]);
                    p.line_to(at);
                }
                (true, _) => p.line_to(at),
                _ => p.move_to(at),
            }
            pen_down = true;
            last = Some(at);
        }
        sheet.shape(Layer::Rib, &line, What::Nothing, p.into_text());
    }
    if matches!(s.look, Look::Line | Look::Marks) {
        let reach = if s.points.len() > 120 { 3.4 } else { 6.2 };
        let mut p = Path::new();
        let mut last: Option<[f64; 2]> = None;
        for q in &s.points {
            let at = plot.at(q.x, q.y);
            let crowded = s.look == Look::Line
                && last.is_some_and(|l| (l[0] - at[0]).hypot(l[1] - at[1]) < 3.0 * reach);
            if plot.holds(at) && !crowded {
                marker(&mut p, k, at, reach);
                last = Some(at);
            }
        }
        sheet.shape(Layer::Boss, &format!("mark s{k}"), What::Nothing, p.into_text());
    }
}

/// The markers: lozenge, disc, triangle, square, star of three, hexagon.
fn marker(p: &mut Path, k: usize, at: [f64; 2], r: f64) {
    let tau = std::f64::consts::TAU;
    let mut polygon = |n: usize, turn: f64, r: f64, waist: f64| {
        let count = if waist < 1.0 { 2 * n } else { n };
        for i in 0..count {
            let a = turn + tau * i as f64 / count as f64;
            let r = if waist < 1.0 && i % 2 == 1 { r * waist } else { r };
            let point = [at[0] + r * a.cos(), at[1] + r * a.sin()];
            if i == 0 { p.move_to(point) } else { p.line_to(point) }
        }
        p.close();
    };
    match k {
        0 => polygon(4, 0.0, r * 1.15, 1.0),
        1 => p.circle(at, r * 0.9),
        2 => polygon(3, -tau / 4.0, r * 1.25, 1.0),
        3 => polygon(4, tau / 8.0, r * 1.2, 1.0),
        4 => polygon(4, tau / 8.0, r * 1.35, 0.4),
        _ => polygon(6, 0.0, r, 1.0),
    }
}

fn swatch(sheet: &mut Sheet, look: Look, k: usize, at: [f64; 2]) {
    let [x, y] = at;
    let mut p = Path::new();
    if look == Look::Bars {
        p.move_to([x + 6.0, y - 9.0]);
        p.line_to([x + 40.0, y - 9.0]);
        p.line_to([x + 40.0, y + 9.0]);
        p.line_to([x + 6.0, y + 9.0]);
        p.close();
        sheet.shape(Layer::Cell, &format!("bar s{k}"), What::Nothing, p.into_text());
        return;
    }
    if look != Look::Marks {
        p.move_to([x, y]);
        p.line_to([x + 44.0, y]);
        sheet.shape(Layer::Rib, &format!("line s{k}"), What::Nothing, p.into_text());
    }
    if matches!(look, Look::Line | Look::Marks) {
        let mut p = Path::new();
        marker(&mut p, k, [x + 22.0, y], 6.2);
        sheet.shape(Layer::Boss, &format!("mark s{k}"), What::Nothing, p.into_text());
    }
}

fn style(ink: Ink, root: &str, id: &str) -> String {
    let t = |n: &str| ink.tone(n);
    let mut s = String::new();
    let mut rule = |selector: &str, body: String| {
        let _ = writeln!(s, ".{root} {selector}{{{body}}}");
    };
    rule("path", "fill:none;stroke-linecap:butt;stroke-linejoin:round".into());
    rule(".grid", format!("stroke:{};stroke-width:1", t("faint")));
    rule(".axis", format!("stroke:{};stroke-width:1.6;stroke-linecap:square", t("ink")));
    rule("text", format!("font-family:{FAMILY};font-size:{TEXT}px;fill:{}", t("ink")));
    let tones = ["a", "b", "cut", "ink", "c", "soft"];
    let dashes = ["none", "12 5", "3 4", "16 4 3 4", "7 3", "2 2"];
    let fills = [format!("url(#{id}ha)"), format!("url(#{id}hb)"), format!("url(#{id}hc)")];
    for k in 0..LOOKS {
        let tone = t(tones[k]);
        let thin = if k % 2 == 0 { 2.6 } else { 2.2 };
        rule(
            &format!(".line.s{k}"),
            format!("stroke:{tone};stroke-width:{thin};stroke-dasharray:{}", dashes[k]),
        );
        rule(&format!(".error.s{k}"), format!("stroke:{tone};stroke-width:1.6"));
        // Every other marker is open.
        let fill = if k % 2 == 1 { t("paper") } else { tone.clone() };
        rule(&format!(".mark.s{k}"), format!("fill:{fill};stroke:{tone};stroke-width:1.8"));
        let fill = fills.get(k).cloned().unwrap_or_else(|| tone.clone());
        rule(&format!(".bar.s{k}"), format!("fill:{fill};stroke:{tone};stroke-width:1.2"));
    }
    s
}
