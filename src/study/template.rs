//! A study to begin with, every key explained.

/// The text of a commented study file that runs as it stands.
pub const TEMPLATE: &str = include_str!("template.toml");

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::StudyFile;
    use crate::study::file::KEYS;
    use std::path::Path;

    #[test]
    fn the_template_is_a_study_and_names_every_key() {
        StudyFile::parse(TEMPLATE, "new.toml", Path::new(".")).unwrap();
        for key in KEYS.iter().flat_map(|(_, keys)| keys.iter()) {
            assert!(TEMPLATE.contains(key), "the template does not name {key}");
        }
    }

    #[test]
    fn its_examples_are_valid_too() {
        let text: String = TEMPLATE
            .lines()
            .map(|l| {
                let bare = l.strip_prefix("# ").unwrap_or(l);
                let example = bare.starts_with('[')
                    || bare.split_once(" = ").is_some_and(|(key, _)| {
                        key.chars().all(|c| c.is_ascii_lowercase() || c == '_')
                    });
                if example { format!("{bare}\n") } else { format!("{l}\n") }
            })
            .collect();
        StudyFile::parse(&text, "all.toml", Path::new(".")).unwrap();
    }
}
