//! Letters as strokes, drawn for this program on a grid of 4 by 8: capitals stand on line 2 and reach 8, small
//! letters reach 6, tails hang to 0. Each stroke is a chain of points written as two digits, x then y.

/// Distance between the left sides of two letters, grid units.
const ADVANCE: f64 = 5.8;
/// Line on which letters stand, grid units.
const BASE: f64 = 2.0;
/// Height of a capital above the base line, grid units.
const CAPITAL: f64 = 6.0;

/// Width of a text whose capitals have height `capital`.
pub(super) fn width(text: &str, capital: f64) -> f64 {
    let letters = text.chars().count() as f64;
    (letters * ADVANCE - (ADVANCE - 4.0)).max(0.0) * capital / CAPITAL
}

/// Strokes of a text that starts at (0, 0) on the base line, x to the right, y upwards.
pub(super) fn strokes(text: &str, capital: f64) -> Vec<Vec<[f64; 2]>> {
    let unit = capital / CAPITAL;
    let mut all = Vec::new();
    for (i, letter) in text.chars().enumerate() {
        for stroke in shape(letter).split_ascii_whitespace() {
            let digits: Vec<f64> = stroke.bytes().map(|b| f64::from(b - b'0')).collect();
            let place = |p: &[f64]| [(i as f64 * ADVANCE + p[0]) * unit, (p[1] - BASE) * unit];
            all.push(digits.chunks_exact(2).map(place).collect());
        }
    }
    all
}

/// The strokes of one letter; a box for those that were not drawn.
fn shape(letter: char) -> &'static str {
    match letter {
        ' ' => "",
        '0' => "120307183847433212",
        '1' => "172822 1232",
        '2' => "07183847460242",
        '3' => "0718384746354443321203 1535",
        '4' => "32380444",
        '5' => "480805354443321203",
        '6' => "38180703123243443505",
        '7' => "084812",
        '8' => "15060718384746351504031232434435",
        '9' => "45150607183847433212",
        'A' => "022842 1535",
        'B' => "02083847463505 3544433202",
        'C' => "4738180703123243",
        'D' => "02083847433202",
        'E' => "48080242 0535",
        'F' => "480802 0535",
        'G' => "47381807031232434525",
        'H' => "0208 4248 0545",
        'I' => "2228 1232 1838",
        'J' => "3833221203",
        'K' => "0208 480542",
        'L' => "080242",
        'M' => "0208254842",
        'N' => "02084248",
        'O' => "120307183847433212",
        'P' => "02083847463505",
        'Q' => "120307183847433212 2442",
        'R' => "02083847463505 2542",
        'S' => "473818070615354443321203",
        'T' => "0848 2822",
        'U' => "080312324348",
        'V' => "082248",
        'W' => "0812253248",
        'X' => "0248 0842",
        'Y' => "082548 2522",
        'Z' => "08480242",
        'a' => "16364542 441403123243",
        'b' => "0208 0516364543321203",
        'c' => "4536160503123243",
        'd' => "4248 4536160503123243",
        'e' => "04444536160503123243",
        'f' => "48382722 1636",
        'g' => "4641301001 4536160503123243",
        'h' => "0208 0516364542",
        'i' => "162622 2828",
        'j' => "3631201001 3838",
        'k' => "0208 460442",
        'l' => "18282332",
        'm' => "0206 05162522 25364542",
        'n' => "0206 0516364542",
        'o' => "120305163645433212",
        'p' => "0006 0516364543321203",
        'q' => "4046 4536160503123243",
        'r' => "0206 05163645",
        's' => "45361605143443321203",
        't' => "28233242 1636",
        'u' => "060312324346 4642",
        'v' => "062246",
        'w' => "0612243246",
        'x' => "0246 0642",
        'y' => "0622 4610",
        'z' => "06460242",
        '.' => "2222",
        ',' => "2311",
        '-' => "0545",
        '+' => "0545 2327",
        '/' => "0248",
        '(' => "38272332",
        ')' => "18272312",
        ':' => "2323 2626",
        ';' => "2311 2626",
        '=' => "0646 0444",
        '^' => "162836",
        '%' => "0248 0707 4343",
        '*' => "2327 1436 1634",
        '_' => "0242",
        '\'' => "2826",
        '"' => "1816 3836",
        '?' => "07183847462524 2222",
        '!' => "2824 2222",
        '<' => "460442",
        '>' => "064402",
        '[' => "38282232",
        ']' => "18282212",
        '#' => "1218 3238 0444 0646",
        '&' => "420607182737360503122244",
        '|' => "2028",
        _ => "0206460200 4246",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_printable_letter_is_whole() {
        for letter in (' '..='~').chain(['\u{e4}', '\u{4e2d}']) {
            for stroke in shape(letter).split_ascii_whitespace() {
                assert!(
                    stroke.len() % 2 == 0 && stroke.len() >= 4,
                    "{letter}: {stroke}"
                );
                assert!(
                    stroke.bytes().all(|b| (b'0'..=b'8').contains(&b)),
                    "{letter}"
                );
            }
        }
    }

    #[test]
    fn texts_are_as_wide_as_told() {
        for text in ["W", "WWWW", "Heat 12.5 W/m"] {
            let strokes = strokes(text, 12.0);
            let right = strokes.iter().flatten().fold(0.0f64, |m, p| m.max(p[0]));
            assert!(right <= width(text, 12.0) + 1e-12);
        }
        assert_eq!(width("", 12.0), 0.0);
    }
}
