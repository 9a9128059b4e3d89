//! Reads a drawing back.

use resvg::usvg::roxmltree::Document;

/// An arc of a path.
#[derive(Debug, Clone, Copy)]
pub struct Arc {
    pub from: [f64; 2],
    pub to: [f64; 2],
    pub radius: f64,
    pub clockwise: bool,
}

/// One element with its class, its data and its path.
struct Shape {
    class: String,
    data: Vec<(String, usize)>,
    d: String,
}

pub struct Drawing {
    shapes: Vec<Shape>,
    texts: Vec<String>,
    ids: Vec<String>,
}

impl Drawing {
    /// # Panics
    /// Where the text is no XML.
    pub fn read(svg: &str) -> Self {
        let xml = Document::parse(svg).expect("well-formed XML");
        let inside = |n: &resvg::usvg::roxmltree::Node<'_, '_>| {
            !n.ancestors().any(|a| a.has_tag_name("defs"))
        };
        let shapes = xml
            .descendants()
            .filter(|n| n.has_tag_name("path") && inside(n))
            .map(|n| Shape {
                class: n.attribute("class").unwrap_or_default().to_owned(),
                data: n
                    .attributes()
                    .filter(|a| a.name().starts_with("data-"))
                    .map(|a| (a.name().to_owned(), a.value().parse().expect("a number")))
                    .collect(),
                d: n.attribute("d").expect("a path").to_owned(),
            })
            .collect();
        let texts = xml
            .descendants()
            .filter(|n| n.has_tag_name("text"))
            .map(|n| n.text().unwrap_or_default().to_owned())
            .collect();
        let ids = xml.descendants().filter_map(|n| n.attribute("id")).map(str::to_owned).collect();
        Self { shapes, texts, ids }
    }
    fn of<'a>(&'a self, class: &'a str) -> impl Iterator<Item = &'a Shape> {
        let words: Vec<&str> = class.split(' ').collect();
        self.shapes
            .iter()
            .filter(move |s| words.iter().all(|w| s.class.split(' ').any(|c| c == *w)))
    }
    /// The numbers that shapes of a class carry, ascending.
    pub fn numbers(&self, class: &str, data: &str) -> Vec<usize> {
        let mut all: Vec<usize> = self
            .of(class)
            .flat_map(|s| s.data.iter().filter(|d| d.0 == data).map(|d| d.1))
            .collect();
        all.sort_unstable();
        all
    }
    pub fn texts(&self) -> Vec<String> {
        self.texts.clone()
    }
    pub fn ids(&self) -> Vec<String> {
        self.ids.clone()
    }
    /// How many closed figures shapes of a class have.
    pub fn closed(&self, class: &str) -> usize {
        self.of(class).map(|s| s.d.matches('Z').count()).sum()
    }
    /// Every point that a path runs through.
    pub fn points(&self) -> Vec<(f64, f64)> {
        self.shapes.iter().flat_map(|s| walk(&s.d).0).collect()
    }
    pub fn points_of(&self, class: &str) -> Vec<(f64, f64)> {
        self.of(class).flat_map(|s| walk(&s.d).0).collect()
    }
    pub fn arcs(&self, class: &str) -> Vec<Arc> {
        self.of(class).flat_map(|s| walk(&s.d).1).collect()
    }
}

/// Ends of all pieces of a path, and its arcs.
fn walk(d: &str) -> (Vec<(f64, f64)>, Vec<Arc>) {
    let (mut points, mut arcs) = (Vec::new(), Vec::new());
    let mut at = [0.0; 2];
    let mut rest = d;
    while let Some(letter) = rest.chars().next() {
        let end = rest[1..].find(|c: char| c.is_ascii_uppercase()).map_or(rest.len(), |i| i + 1);
        let x = numbers(&rest[1..end]);
        rest = &rest[end..];
        let to = match (letter, x.as_slice()) {
            ('M' | 'L', [a, b]) | ('Q', [_, _, a, b]) | ('C', [_, _, _, _, a, b]) => [*a, *b],
            ('A', [r, same, 0.0, _, sweep, a, b]) => {
                assert_eq!(r, same);
                let clockwise = *sweep == 1.0;
                arcs.push(Arc { from: at, to: [*a, *b], radius: *r, clockwise });
                [*a, *b]
            }
            ('Z', []) => continue,
            other => panic!("{other:?} in {d:?}"),
        };
        points.push((to[0], to[1]));
        at = to;
    }
    (points, arcs)
}

fn numbers(text: &str) -> Vec<f64> {
    let mut all = Vec::new();
    let mut word = String::new();
    for c in text.chars().chain([' ']) {
        if (c == ' ' || c == '-') && !word.is_empty() {
            all.push(word.parse().expect("a number"));
            word.clear();
        }
        if c != ' ' {
            word.push(c);
        }
    }
    all
}
