//! A second fill of a filled workbook: the same bytes, and nothing lost that a person typed on hence's own sheets.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::Package;

use crate::libreoffice::books;

fn package(name: &str, bytes: Vec<u8>) -> Package {
    Package::from_bytes(name, bytes).expect("a package")
}

fn filled(package: &Package) -> Filled {
    fill(package, &FillRequest::default(), &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

#[test]
fn scratch() {
    for (name, bytes) in [
        ("options.xlsx", books::options().bytes()),
        ("case.xlsx", books::CASES[6].book().bytes()),
        ("s.xlsx", std::fs::read("../../samples/mine-drainage.xlsx").unwrap()),
        ("s2.xlsx", std::fs::read("../../samples/mine-drainage-libreoffice.xlsx").unwrap()),
    ] {
        let input = package(name, bytes);
        let first = filled(&input).bytes;
        assert!(first == filled(&input).bytes, "same input");
        let a = package(name, first);
        let second = filled(&a).bytes;
        let b = package(name, second);
        let third = package(name, filled(&b).bytes);
        println!("{name}");
        std::fs::write(format!("/tmp/out/1-{name}"), a.bytes()).unwrap();
        std::fs::write(format!("/tmp/out/2-{name}"), b.bytes()).unwrap();
        for (x, y, n) in [(&a, &b, 12), (&b, &third, 23)] {
            let p: Vec<&str> = x.parts().collect();
            let q: Vec<&str> = y.parts().collect();
            println!("{n} parts same list: {}", p == q);
            if p != q {
                println!("{p:?}\n{q:?}");
            }
            for part in x.parts() {
                if x.part(part).unwrap() != y.part(part).unwrap() {
                    println!("{n} differs {part}");
                    if name != "s.xlsx" || true {
                        let (u, v) = (
                            String::from_utf8(x.part(part).unwrap().unwrap()).unwrap(),
                            String::from_utf8(y.part(part).unwrap().unwrap_or_default()).unwrap(),
                        );
                        let i = u.bytes().zip(v.bytes()).take_while(|(a, b)| a == b).count();
                        println!(
                            "   {}\n   {}",
                            u.get(i.saturating_sub(100)..(i + 200).min(u.len())).unwrap_or("?"),
                            v.get(i.saturating_sub(100)..(i + 200).min(v.len())).unwrap_or("?")
                        );
                    }
                }
            }
        }
    }
}
