//! Many threads on one handle of the shared library.

use crate::loaded::Basis;

#[test]
fn one_handle_serves_many_threads() {
    let basis = Basis::parse("0.5 of (gamma mean 4% sd 3%), 0.5 of (3.5% to 30, 3% after)");
    let offsets: Vec<f64> = (0..2000).map(|i| f64::from(i) * 0.17).collect();
    let due = basis.factors(&offsets);
    std::thread::scope(|scope| {
        for _ in 0..16 {
            scope.spawn(|| {
                for _ in 0..20 {
                    let found = basis.factors(&offsets);
                    assert!(found.iter().zip(&due).all(|(a, b)| a.to_bits() == b.to_bits()));
                    // Each thread also makes and frees handles of its own.
                    assert_eq!(Basis::parse("3.5%").factors(&[0.0]), [1.0]);
                }
            });
        }
    });
}
