//! How wide a text is in the font that ships, so that labels do not run into each other.

/// Advance widths of the printable ASCII characters in DejaVu Sans Condensed, 2048 to the em.
const ADVANCE: [u16; 95] = [
    585, 738, 847, 1544, 1172, 1751, 1437, 506, 719, 719, 921, 1544, 585, 665, 585, 621, 1172,
    1172, 1172, 1172, 1172, 1172, 1172, 1172, 1172, 1172, 621, 621, 1544, 1544, 1544, 978, 1843,
    1260, 1264, 1287, 1419, 1164, 1060, 1428, 1386, 543, 543, 1208, 1026, 1590, 1378, 1450, 1111,
    1450, 1280, 1170, 1125, 1349, 1260, 1822, 1262, 1125, 1262, 719, 621, 719, 1544, 921, 921,
    1129, 1170, 1013, 1170, 1134, 648, 1170, 1168, 512, 512, 1067, 512, 1795, 1168, 1127, 1170,
    1170, 757, 960, 722, 1168, 1090, 1507, 1090, 1090, 967, 1172, 621, 1172, 1544,
];

/// Width of `text` at a font size of `size`, in the same unit.
pub(super) fn width(text: &str, size: f64) -> f64 {
    let em: u32 = text
        .chars()
        .map(|c| match (c as u32).checked_sub(0x20) {
            Some(i) if i < 95 => u32::from(ADVANCE[i as usize]),
            _ if "−×≤≥≈…∞".contains(c) => 1700,
            _ => 1220,
        })
        .sum();
    f64::from(em) / 2048.0 * size
}

/// `text` with the five characters that XML reserves written as entities, and without
/// characters that XML forbids.
pub(super) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            c if (c as u32) < 0x20 || matches!(c as u32, 0xfffe | 0xffff) => out.push(' '),
            c => out.push(c),
        }
    }
    out
}

/// `text` cut to at most `room`, an ellipsis in place of what was cut.
pub(super) fn fit(text: &str, size: f64, room: f64) -> String {
    if width(text, size) <= room {
        return text.to_owned();
    }
    let mut kept = String::new();
    for c in text.chars() {
        kept.push(c);
        if width(&kept, size) + width("…", size) > room {
            kept.pop();
            break;
        }
    }
    kept.push('…');
    kept
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn texts_are_cut_to_their_room() {
        assert_eq!(fit("abc", 20.0, 100.0), "abc");
        let cut = fit("a very long name of a network", 20.0, 100.0);
        assert!(cut.ends_with('…') && width(&cut, 20.0) <= 100.0);
    }

    #[test]
    fn reserved_characters_are_escaped() {
        assert_eq!(escape("a<b & \"c\"\u{1}"), "a&lt;b &amp; &quot;c&quot; ");
    }
}
