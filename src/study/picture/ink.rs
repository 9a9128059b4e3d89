//! Colours, hatchings and line widths that all pictures and charts share.
//!
//! Nothing is told by colour alone: the region's share is blue and hatched, the rest's share
//! ochre and dotted, the core plain, the cut the heaviest line. Blue and ochre keep apart
//! under the common kinds of colour blindness, and deep and light tones in greyscale.

use std::fmt::Write;

/// How colours get into a drawing.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Ink {
    /// Fixed colours on white paper: files that stand alone.
    #[default]
    Light,
    /// Fixed colours on dark paper: slides.
    Dark,
    /// CSS variables `--lierne-…` with the light colours as fall-back, no paper: drawings
    /// inside a page that switches between light and dark (see [`theme_css`]).
    Page,
}

/// (name, light, dark).
const TONES: [(&str, &str, &str); 13] = [
    ("paper", "#ffffff", "#15171c"),
    ("ink", "#24222b", "#ebe8df"),
    ("web", "#fbfaf6", "#1b1e25"),
    ("wall", "#c3bdb0", "#4d4b47"),
    ("edge", "#7d776b", "#8f8b82"),
    ("faint", "#e4dfd4", "#33343a"),
    ("a", "#1c5a9c", "#86bdf2"),
    ("a-pale", "#cfe1f4", "#1f3d5b"),
    ("b", "#a65f00", "#f0b550"),
    ("b-pale", "#fbe7c0", "#473414"),
    ("cut", "#9c0f3c", "#ff87a6"),
    ("c", "#0b7a62", "#5fd0b3"),
    ("soft", "#5d5a66", "#b5b2ab"),
];

impl Ink {
    /// The CSS value of a tone.
    pub(super) fn tone(self, name: &str) -> String {
        let (_, light, dark) =
            TONES.iter().find(|t| t.0 == name).expect("tones are named in this module's list");
        match self {
            Self::Light => (*light).to_owned(),
            Self::Dark => (*dark).to_owned(),
            Self::Page => format!("var(--lierne-{name},{light})"),
        }
    }
    /// Whether the drawing brings its own paper.
    pub(super) fn has_paper(self) -> bool {
        self != Self::Page
    }
}

/// The style sheet that sets the variables of [`Ink::Page`]: light by default, dark where the
/// reader's system asks for it or an ancestor carries `data-theme="dark"`.
pub fn theme_css() -> String {
    let list = |pick: fn(&(&str, &'static str, &'static str)) -> &'static str| {
        TONES.iter().fold(String::new(), |mut s, t| {
            let _ = write!(s, "--lierne-{}:{};", t.0, pick(t));
            s
        })
    };
    let (light, dark) = (list(|t| t.1), list(|t| t.2));
    format!(
        ":root,[data-theme=\"light\"]{{{light}}}\n[data-theme=\"dark\"]{{{dark}}}\n@media (prefers-color-scheme:dark){{:root:not([data-theme=\"light\"]){{{dark}}}}}\n@media print{{:root,[data-theme]{{{light}}}}}\n"
    )
}

/// Width of a rib (bond) and of a wall (tile's side) by level of detail, units of 0.1 mm.
pub(super) const RIB: [f64; 7] = [0.4, 0.7, 1.1, 1.9, 3.2, 4.8, 6.4];
const WALL: [f64; 7] = [0.3, 0.4, 0.6, 0.8, 1.0, 1.2, 1.4];
/// The light core of a moulded rib; none for far ones.
pub(super) const MOULD: [f64; 7] = [0.0, 0.0, 0.0, 0.0, 1.3, 2.2, 3.2];
const CUT: [f64; 7] = [1.6, 2.2, 3.0, 4.2, 5.6, 7.0, 8.0];

/// Bands under bonds whose two tensors have one share.
const POD: [f64; 7] = [1.0, 1.8, 3.4, 7.0, 14.0, 27.0, 40.0];

/// Font size of all text in a drawing: 6 pt where the drawing is 85 mm wide.
pub const TEXT: f64 = 21.5;

/// The families asked for, the one that ships first.
pub(super) const FAMILY: &str = "'DejaVu Sans Condensed','DejaVu Sans',Verdana,sans-serif";

/// Hatchings; `id` keeps those of several drawings on one page apart.
pub(super) fn patterns(ink: Ink, id: &str) -> String {
    let (a, ap, b, bp) = (ink.tone("a"), ink.tone("a-pale"), ink.tone("b"), ink.tone("b-pale"));
    let (paper, cut) = (ink.tone("paper"), ink.tone("cut"));
    format!(
        "<pattern id=\"{id}ha\" width=\"9\" height=\"9\" patternUnits=\"userSpaceOnUse\" patternTransform=\"rotate(45)\"><rect width=\"9\" height=\"9\" style=\"fill:{ap}\"/><rect width=\"1.5\" height=\"9\" style=\"fill:{a}\"/></pattern>\
         <pattern id=\"{id}hb\" width=\"10\" height=\"10\" patternUnits=\"userSpaceOnUse\"><rect width=\"10\" height=\"10\" style=\"fill:{bp}\"/><circle cx=\"2.5\" cy=\"2.5\" r=\"1.3\" style=\"fill:{b}\"/><circle cx=\"7.5\" cy=\"7.5\" r=\"1.3\" style=\"fill:{b}\"/></pattern>\
         <pattern id=\"{id}hc\" width=\"7\" height=\"7\" patternUnits=\"userSpaceOnUse\" patternTransform=\"rotate(-45)\"><rect width=\"7\" height=\"7\" style=\"fill:{paper}\"/><rect width=\"3\" height=\"7\" style=\"fill:{cut}\"/></pattern>"
    )
}

/// The style sheet of a drawing of a network, all of it under the class `root`.
pub(super) fn style(ink: Ink, root: &str, id: &str) -> String {
    let t = |n: &str| ink.tone(n);
    let mut s = String::new();
    let mut rule = |selector: &str, body: String| {
        for (i, part) in selector.split(',').enumerate() {
            let _ = write!(s, "{}.{root} {part}", if i > 0 { "," } else { "" });
        }
        let _ = writeln!(s, "{{{body}}}");
    };
    rule("path", "fill:none;stroke-linecap:round;stroke-linejoin:round".into());
    rule(".disk", format!("fill:{};stroke:{};stroke-width:1.2", t("web"), t("edge")));
    rule(".cell", "stroke:none".into());
    rule(".cell.a", format!("fill:url(#{id}ha)"));
    rule(".cell.b", format!("fill:url(#{id}hb)"));
    rule(".cell.core", format!("fill:{}", t("paper")));
    rule(".pod.a", format!("fill:none;stroke:url(#{id}ha)"));
    rule(".pod.b", format!("fill:none;stroke:url(#{id}hb)"));
    rule(".wall", format!("stroke:{}", t("wall")));
    for (k, width) in POD.iter().enumerate() {
        rule(&format!(".pod.k{k}"), format!("stroke-width:{width}"));
    }
    rule(".gate", "stroke:none".into());
    rule(".rib", format!("stroke:{}", t("ink")));
    rule(".mould", format!("stroke:{}", t("paper")));
    for (kind, widths) in [("wall", WALL), ("rib", RIB), ("mould", MOULD)] {
        for (k, width) in widths.iter().enumerate().filter(|w| *w.1 > 0.0) {
            rule(&format!(".{kind}.k{k}"), format!("stroke-width:{width}"));
        }
    }
    rule(".casing", format!("stroke:{}", t("paper")));
    for (k, width) in CUT.iter().enumerate() {
        rule(&format!(".casing.k{k}"), format!("stroke-width:{}", width * 1.9));
        rule(&format!(".cut.k{k}"), format!("stroke:{};stroke-width:{width}", t("cut")));
    }
    rule(".boss", format!("fill:{};stroke:{};stroke-width:1", t("ink"), t("ink")));
    rule(".boss.v1", format!("fill:{}", t("paper")));
    rule(".boss.v2", format!("fill:{}", t("soft")));
    rule(".boss.v3", format!("fill:{}", t("wall")));
    rule(".boss.far", "stroke-width:.3".into());
    rule(".cap", format!("fill:{};stroke:{};stroke-width:1.4", t("paper"), t("ink")));
    rule(".bulk", format!("fill:{};stroke:{};stroke-width:1.6", t("paper"), t("ink")));
    rule(".bulk.a", format!("fill:{};stroke:{};stroke-width:2.2", t("a"), t("paper")));
    rule(".bulk.b", format!("fill:{};stroke:{};stroke-width:2.2", t("b-pale"), t("b")));
    rule(".bulk.lost", format!("fill:{};stroke:{};stroke-width:1.6", t("paper"), t("ink")));
    rule(".halo.a", format!("fill:url(#{id}ha);stroke:{};stroke-width:1.2", t("a")));
    rule(".halo.b", format!("fill:url(#{id}hb);stroke:{};stroke-width:1.2", t("b")));
    rule(".strike", format!("stroke:{};stroke-width:1.6", t("ink")));
    rule(".knot", format!("fill:{};stroke:none", t("ink")));
    rule(".site", format!("fill:{};stroke:{};stroke-width:.8", t("faint"), t("edge")));
    rule(".site.region", format!("fill:{};stroke:{}", t("a"), t("a")));
    rule(".tick", format!("stroke:{};stroke-width:.8", t("edge")));
    rule("text", format!("font-family:{FAMILY};font-size:{TEXT}px;fill:{}", t("ink")));
    rule(".soft", format!("fill:{}", t("soft")));
    rule(
        ".name",
        format!("stroke:{};stroke-width:4;stroke-linejoin:round;paint-order:stroke", t("paper")),
    );
    s
}
