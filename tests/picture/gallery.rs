//! The gallery: a picture of every file in networks/, and the page that lists them.

use super::drawing::Drawing;
use super::program::{comment, draw, networks, root, stem};
use std::fmt::Write;
use std::path::Path;

/// How a file is drawn: a quarter of the boundary as the region, with its cut and what
/// closure absorbs, and with the recoverable legs where there are bulk legs; without marks
/// where there is no boundary.
pub fn arguments(file: &Path) -> Vec<String> {
    let shown = file.strip_prefix(root()).expect("inside").display().to_string();
    let out = draw(&[&shown]);
    let svg = String::from_utf8(out.stdout).expect("UTF-8");
    let desc = description(&svg);
    let count = |what: &str| -> usize {
        let before = desc.split(what).next().unwrap_or_default();
        before.rsplit([' ', ',']).find(|w| !w.is_empty()).and_then(|w| w.parse().ok()).unwrap_or(0)
    };
    let (sites, bulk) = (count(" boundary legs"), count(" bulk legs"));
    let mut all = vec![shown];
    if sites > 3 {
        all.extend(["--region".into(), format!("0..{}", sites.div_ceil(3))]);
        all.extend(["--cut".into(), "--closure".into()]);
        if bulk > 0 {
            all.push("--recover".into());
        }
    }
    all
}

/// What a drawing says about itself: the text of its `desc`.
fn description(svg: &str) -> &str {
    let after = svg.split("<desc").nth(1).and_then(|d| d.split_once('>'));
    after.map_or("", |d| d.1).split('<').next().unwrap_or_default()
}

/// Draws every file anew and writes the page; both are committed.
///
/// # Panics
/// Where a file cannot be drawn.
pub fn write() {
    let folder = root().join("docs/gallery");
    std::fs::create_dir_all(&folder).expect("docs/gallery");
    let mut page = String::from(
        "# Gallery\n\n\
         Every file in `networks/`, drawn by `lierne draw` with a third of its boundary as the \
         region: the sites of the region are dark, the curve is the minimal cut, hatched tensors \
         are absorbed from the region, dotted ones from its complement, plain ones are the core. \
         Filled rings are bulk legs that can be recovered. Written by\n\
         `cargo test --test picture gallery -- --ignored`.\n\n\
         | file | picture | what it is for |\n|---|---|---|\n",
    );
    for file in networks() {
        let name = stem(&file);
        let mut all = arguments(&file);
        let target = format!("docs/gallery/{name}.svg");
        all.extend(["--out".into(), target]);
        let all: Vec<&str> = all.iter().map(String::as_str).collect();
        super::program::status(&all, 0);
        let shown = file.file_name().expect("a file").to_string_lossy();
        let about = comment(&file).replace('|', "\\|").replace('<', "&lt;");
        writeln!(
            page,
            "| [`{shown}`](../../networks/{shown}) | <img src=\"{name}.svg\" width=\"320\" alt=\"{name}\"> | {about} |",
        )
        .expect("a string");
    }
    std::fs::write(folder.join("README.md"), page).expect("the page");
}

/// Every file that ships has its picture in the gallery, and its row on the page.
pub fn check() {
    let page = std::fs::read_to_string(root().join("docs/gallery/README.md")).expect("the page");
    for file in networks() {
        let name = stem(&file);
        let picture = root().join(format!("docs/gallery/{name}.svg"));
        let svg = std::fs::read_to_string(&picture)
            .unwrap_or_else(|e| panic!("{}: {e}; write the gallery anew", picture.display()));
        Drawing::read(&svg);
        assert!(page.contains(&format!("{name}.svg")), "{name} has a row in the gallery");
        // What is drawn now has the parts that the committed picture has.
        let now = arguments(&file);
        let now: Vec<&str> = now.iter().map(String::as_str).collect();
        let fresh = String::from_utf8(super::program::status(&now, 0).stdout).expect("UTF-8");
        let _parts =
            |svg: &str| svg.split("desc\">").nth(1).map(|d| d.split('<').next().map(str::to_owned));
        assert_eq!(
            description(&svg),
            description(&fresh),
            "{name} has changed; write the gallery anew"
        );
    }
}
