//! Plain-text tables and numbers with as many digits as they deserve.

/// A table of aligned plain text: numbers to the right, words to the left.
///
/// ```
/// use hypercircle_export::Table;
/// let table = Table::new(&["quantity", "value", "unit"])
///     .row(["heat flow", "9.49", "W/m"])
///     .row(["coldest surface", "12.3", "°C"]);
/// assert_eq!(
///     table.to_string(),
///     "quantity         value  unit\n\
///      ---------------  -----  ----\n\
///      heat flow         9.49  W/m\n\
///      coldest surface   12.3  °C\n"
/// );
/// ```
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Table {
    head: Vec<String>,
    rows: Vec<Vec<String>>,
}

impl Table {
    /// An empty table with the given heads of columns.
    #[must_use]
    pub fn new(head: &[&str]) -> Self {
        Self { head: head.iter().map(|h| (*h).to_string()).collect(), rows: Vec::new() }
    }

    /// Adds a row. A row that is too short is filled with empty cells, one that is too long widens the table.
    #[must_use]
    pub fn row<S: Into<String>>(mut self, cells: impl IntoIterator<Item = S>) -> Self {
        self.rows.push(cells.into_iter().map(Into::into).collect());
        self
    }

    /// The same table with a separator between cells, a comma or a tab, for spreadsheets and scripts.
    ///
    /// A cell that contains the separator, a quotation mark or a line break is put in quotation marks.
    ///
    /// ```
    /// use hypercircle_export::Table;
    /// let table = Table::new(&["what", "value, W/m"]).row(["flow", "9.49"]);
    /// assert_eq!(table.separated(','), "what,\"value, W/m\"\nflow,9.49\n");
    /// ```
    ///
    /// # Source
    /// RFC 4180 for quotation; lines end with a line feed.
    #[must_use]
    pub fn separated(&self, separator: char) -> String {
        let columns = self.columns();
        let mut text = String::new();
        for row in [&self.head].into_iter().chain(&self.rows) {
            let cells: Vec<String> =
                (0..columns).map(|c| quoted(row.get(c).map_or("", String::as_str), separator)).collect();
            text += &cells.join(separator.encode_utf8(&mut [0; 4]));
            text.push('\n');
        }
        text
    }

    fn columns(&self) -> usize {
        self.rows.iter().map(Vec::len).chain([self.head.len()]).max().unwrap_or(0)
    }
}

impl std::fmt::Display for Table {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let columns = self.columns();
        let width: Vec<usize> = (0..columns)
            .map(|c| self.rows.iter().chain([&self.head]).filter_map(|r| r.get(c)).map(|t| t.chars().count()).max())
            .map(|w| w.unwrap_or(0))
            .collect();
        let numeric: Vec<bool> = (0..columns)
            .map(|c| {
                let mut cells = self.rows.iter().filter_map(|r| r.get(c)).filter(|t| !t.is_empty()).peekable();
                cells.peek().is_some() && cells.all(|t| starts_with_number(t))
            })
            .collect();
        let line = |cells: &[String]| {
            let mut text = String::new();
            for c in 0..columns {
                let cell = cells.get(c).map_or("", String::as_str);
                let pad = " ".repeat(width[c] - cell.chars().count());
                text += &if numeric[c] { format!("{pad}{cell}  ") } else { format!("{cell}{pad}  ") };
            }
            text.trim_end().to_string()
        };
        writeln!(f, "{}", line(&self.head))?;
        let rule: Vec<String> = width.iter().map(|&w| "-".repeat(w)).collect();
        writeln!(f, "{}", line(&rule))?;
        self.rows.iter().try_for_each(|row| writeln!(f, "{}", line(row)))
    }
}

/// A cell in quotation marks where it needs them.
fn quoted(cell: &str, separator: char) -> String {
    if cell.contains([separator, '"', '\n', '\r']) { format!("\"{}\"", cell.replace('"', "\"\"")) } else { cell.into() }
}

/// Whether a cell of a table is a number, perhaps with an interval, a percent sign or a unit behind it.
fn starts_with_number(text: &str) -> bool {
    text.split_whitespace().next().is_some_and(|word| {
        word.trim_start_matches(['±', '≤', '≥', '<', '>', '≈']).trim_end_matches('%').parse::<f64>().is_ok()
    })
}

/// A number rounded to so many significant digits, without superfluous exponents.
///
/// ```
/// use hypercircle_export::significant;
/// assert_eq!(significant(9.49153, 3), "9.49");
/// assert_eq!(significant(0.00012345, 2), "0.00012");
/// assert_eq!(significant(6.02214e23, 3), "6.02e23");
/// ```
#[must_use]
pub fn significant(x: f64, digits: usize) -> String {
    let digits = digits.clamp(1, 17);
    if x == 0.0 || !x.is_finite() {
        return if x == 0.0 { "0".into() } else { x.to_string() };
    }
    // The exponent after rounding: 9.996 to three digits is 10.0.
    let scientific = format!("{:.*e}", digits - 1, x);
    let exponent = exponent_of(&scientific);
    if (-5..=6).contains(&exponent) {
        let rounded: f64 = scientific.parse().unwrap_or(x);
        format!("{:.*}", (digits as i32 - 1 - exponent).max(0) as usize, rounded)
    } else {
        scientific
    }
}

/// A value with the interval that encloses it, for example `9.4915 [9.4901, 9.4929] W/m`.
///
/// The width of the interval chooses the digits: two digits of the width are shown. The ends are rounded outwards,
/// so that the printed interval encloses the given one. An empty `unit` is left out.
///
/// ```
/// use hypercircle_export::format_interval;
/// assert_eq!(format_interval(9.49153, 9.49012, 9.49288, "W/m"), "9.4915 [9.4901, 9.4929] W/m");
/// ```
#[must_use]
pub fn format_interval(value: f64, lower: f64, upper: f64, unit: &str) -> String {
    let width = upper - lower;
    let largest = value.abs().max(lower.abs()).max(upper.abs());
    let unit = if unit.is_empty() { String::new() } else { format!(" {unit}") };
    if !(width.is_finite() && largest.is_finite()) || largest == 0.0 {
        return format!("{} [{}, {}]{unit}", in_full(value), in_full(lower), in_full(upper));
    }
    let top = exponent_of(&format!("{largest:e}"));
    // Decimals such that the width shows two digits (1.0e-3 → 4 decimals), but never more than 15 digits in all: so
    // many any double tells apart, and the next printed number outwards is a double of its own.
    let finest = 14 - top;
    let wanted = if width > 0.0 { 1 - exponent_of(&format!("{width:e}")) } else { finest };
    let decimals = wanted.min(finest);
    let (value, lower, upper) = if (-7..=7).contains(&top) {
        let places = decimals.max(0) as usize;
        (fixed(value, places), outward(lower, places, false), outward(upper, places, true))
    } else {
        let places = (decimals + top).max(0) as usize;
        (
            format!("{value:.places$e}"),
            outward_scientific(lower, places, false),
            outward_scientific(upper, places, true),
        )
    };
    format!("{value} [{lower}, {upper}]{unit}")
}

/// A number in its shortest exact form, with an exponent where that is shorter.
fn in_full(x: f64) -> String {
    let scientific = format!("{x:e}");
    if x.is_finite() && !(-7..=14).contains(&exponent_of(&scientific)) { scientific } else { x.to_string() }
}

/// `x` with `places` decimals, zero without a sign.
fn fixed(x: f64, places: usize) -> String {
    let text = format!("{x:.places$}");
    match text.strip_prefix('-') {
        Some(rest) if rest.bytes().all(|b| b == b'0' || b == b'.') => rest.into(),
        _ => text,
    }
}

/// The decimal exponent in a number printed as `1.5e-3`.
fn exponent_of(scientific: &str) -> i32 {
    scientific.rsplit('e').next().and_then(|e| e.parse().ok()).unwrap_or(0)
}

/// `x` with `places` decimals, rounded up or down, judged by the printed text itself.
fn outward(x: f64, places: usize, up: bool) -> String {
    step_out(x, up, |y| fixed(y, places), 10f64.powi(-(places as i32)))
}

/// The same in scientific notation.
fn outward_scientific(x: f64, places: usize, up: bool) -> String {
    let exponent = exponent_of(&format!("{x:e}"));
    step_out(x, up, |y| format!("{y:.places$e}"), 10f64.powi(exponent.saturating_sub(places as i32)))
}

/// Prints `x`; where that falls on the wrong side, prints the next number one `unit` further out.
fn step_out(x: f64, up: bool, print: impl Fn(f64) -> String, unit: f64) -> String {
    let text = print(x);
    let shown: f64 = text.parse().unwrap_or(x);
    if up && shown < x {
        print(shown + unit)
    } else if !up && shown > x {
        print(shown - unit)
    } else {
        text
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_go_right_and_words_left() {
        let text = Table::new(&["what", "K"]).row(["a", "1.5"]).row(["long name", "-10"]).to_string();
        assert_eq!(text, "what         K\n---------  ---\na          1.5\nlong name  -10\n");
    }

    #[test]
    fn uneven_rows_and_wide_letters_keep_the_columns() {
        let text = Table::new(&["q"]).row(["λ·∇u", "W/m²"]).row(["x"]).to_string();
        assert_eq!(text, "q\n----  ----\nλ·∇u  W/m²\nx\n");
        assert_eq!(Table::new(&[]).to_string(), "\n\n");
    }

    #[test]
    fn separated_cells_are_quoted_where_they_must() {
        let table = Table::new(&["a", "b"]).row(["1,5", "x\"y"]).row(["two\nlines", "t\tt"]).row(["short"]);
        assert_eq!(table.separated(','), "a,b\n\"1,5\",\"x\"\"y\"\n\"two\nlines\",t\tt\nshort,\n");
        assert_eq!(table.separated('\t').lines().last(), Some("short\t"));
    }

    #[test]
    fn significant_digits_round_before_they_count() {
        assert_eq!(significant(9.996, 3), "10.0");
        assert_eq!(significant(-123456.0, 3), "-123000");
        assert_eq!(significant(0.0, 3), "0");
        assert_eq!(significant(1.0e-9, 2), "1.0e-9");
        assert_eq!(significant(f64::NAN, 3), "NaN");
    }

    #[test]
    fn ends_are_rounded_outwards() {
        assert_eq!(format_interval(1.0, 0.99991, 1.00009, ""), "1.00000 [0.99991, 1.00009]");
        assert_eq!(format_interval(0.5, 0.4949, 0.5051, "K"), "0.500 [0.494, 0.506] K");
        assert_eq!(format_interval(-2.0, -2.0151, -1.9849, "K"), "-2.000 [-2.016, -1.984] K");
        assert_eq!(format_interval(1.0e12, 0.99e12, 1.011e12, ""), "1.000e12 [9.900e11, 1.011e12]");
    }

    #[test]
    fn a_printed_interval_encloses_the_given_one() {
        for i in 1..400_i32 {
            let value = (f64::from(i) * 0.37).sin() * 10f64.powi(i % 23 - 11);
            let (lower, upper) = (value - value.abs() * 1.234e-3, value + value.abs() * 5.678e-4);
            let text = format_interval(value, lower, upper, "");
            let inside = text.split(['[', ']']).nth(1).unwrap();
            let (a, b) = inside.split_once(", ").unwrap();
            assert!(a.parse::<f64>().unwrap() <= lower, "{text} {lower}");
            assert!(b.parse::<f64>().unwrap() >= upper, "{text} {upper}");
        }
    }

    #[test]
    fn intervals_near_the_last_digit_of_a_double_are_enclosed_too() {
        for i in 1..20_000_u64 {
            // Neighboring doubles all over the decades.
            let lower = (i as f64).sqrt() * 10f64.powi((i % 41) as i32 - 20);
            let upper = f64::from_bits(lower.to_bits() + i % 5);
            let text = format_interval(lower, lower, upper, "");
            let (a, b) = text.split(['[', ']']).nth(1).unwrap().split_once(", ").unwrap();
            assert!(a.parse::<f64>().unwrap() <= lower && b.parse::<f64>().unwrap() >= upper, "{text} {lower} {upper}");
        }
    }

    #[test]
    fn numbers_too_large_for_an_interval_stay_short() {
        assert_eq!(format_interval(1.5e308, -1.5e308, 1.5e308, "W"), "1.5e308 [-1.5e308, 1.5e308] W");
        assert_eq!(format_interval(f64::NAN, 0.0, f64::INFINITY, ""), "NaN [0, inf]");
    }

    #[test]
    fn zero_has_no_sign() {
        assert_eq!(format_interval(-0.0001, -0.0002, 0.5, ""), "0.00 [-0.01, 0.50]");
    }

    #[test]
    fn a_point_interval_is_printed_in_full() {
        assert_eq!(format_interval(0.0, 0.0, 0.0, "W"), "0 [0, 0] W");
        assert_eq!(format_interval(1.0, 1.0, 1.0, ""), "1.00000000000000 [1.00000000000000, 1.00000000000000]");
    }
}
