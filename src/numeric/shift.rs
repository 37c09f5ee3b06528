//! Sums of shifted rows: the inner loop of filters along oblique lines. Compiled for several instruction sets;
//! products and sums are never fused, so every machine gives the same bits.

use multiversion::multiversion;

/// out ← out + wa·a + wb·b, element by element over the shortest of the three.
#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
pub fn add_two(out: &mut [f32], a: &[f32], wa: f32, b: &[f32], wb: f32) {
    for ((o, a), b) in out.iter_mut().zip(a).zip(b) {
        *o += wa * a + wb * b;
    }
}

/// out ← wa·a + wb·b, element by element over the shortest of the three.
#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
pub fn mix_two(out: &mut [f32], a: &[f32], wa: f32, b: &[f32], wb: f32) {
    for ((o, a), b) in out.iter_mut().zip(a).zip(b) {
        *o = wa * a + wb * b;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_are_element_by_element() {
        let (a, b) = ([1.0, 2.0, 3.0], [10.0, 20.0, 30.0]);
        let mut out = [1.0f32; 3];
        add_two(&mut out, &a, 2.0, &b, 0.5);
        assert_eq!(out, [8.0, 15.0, 22.0]);
        mix_two(&mut out, &a, 1.0, &b, -1.0);
        assert_eq!(out, [-9.0, -18.0, -27.0]);
    }
}
