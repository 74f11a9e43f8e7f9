//! Angles as text that reads back as the same number.

use std::f64::consts::PI;
use std::io::{self, Write};

/// A multiple of pi over a power of two where that is the very number, else the shortest decimal that reads back.
pub(super) fn write(out: &mut impl Write, angle: f64) -> io::Result<()> {
    if angle == 0.0 {
        return out.write_all(b"0");
    }
    for exponent in 0..=20 {
        let denominator = f64::from(1u32 << exponent);
        let numerator = (angle * denominator / PI).round();
        if numerator != 0.0 && numerator.abs() < 1e6 && numerator * PI / denominator == angle {
            let sign = if numerator < 0.0 { "-" } else { "" };
            write!(out, "{sign}")?;
            if numerator.abs() != 1.0 {
                write!(out, "{}*", numerator.abs())?;
            }
            write!(out, "pi")?;
            return if exponent > 0 { write!(out, "/{denominator}") } else { Ok(()) };
        }
    }
    write!(out, "{angle:?}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn angles_read_back_exactly() {
        for (angle, expected) in [
            (PI / 4.0, "pi/4"),
            (-PI, "-pi"),
            (5.0 * PI / 8.0, "5*pi/8"),
            (0.0, "0"),
            (1e-7, "1e-7"),
            (2.126_880_047_155_5, "2.1268800471555"),
        ] {
            let mut out = Vec::new();
            write(&mut out, angle).unwrap();
            assert_eq!(String::from_utf8(out).unwrap(), expected);
        }
    }
}
