//! The rules of the house, held by an ordinary test: each says why it is there. The floors are
//! read from the picture in the crate's docs, so that there is one list of them.
//!
//! Test code (whatever stands under `#[cfg(test)]`) is exempt from all but the last three rules.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::Path;

use lists::{HOMES, UNSTEADY, WET_WORDS};
use strip::strip;

#[path = "floors/lists.rs"]
mod lists;
#[path = "floors/strip.rs"]
mod strip;

const LINES_MOST: usize = 400;

/// One source file without its tests.
struct Source {
    /// Path under `src`.
    path: String,
    floor: String,
    /// As written.
    text: String,
    /// Comments, texts and test code blanked out, line by line.
    code: String,
}

#[test]
fn a_floor_names_lower_floors_only() {
    // Lower floors can be read, tested and moved without the higher ones; peers that know each
    // other are one floor in disguise.
    let floors = floors();
    check(|s| {
        let mut out = Vec::new();
        let Some(own) = floors.get(&s.floor) else { return out };
        let depth = s.path.trim_end_matches("/mod.rs").split('/').count();
        for (n, line) in s.code.lines().enumerate() {
            for rest in line.split("crate::").skip(1) {
                let name: String = rest.chars().take_while(|c| is_word(*c)).collect();
                let lower = floors.get(&name).is_some_and(|f| f.number < own.number);
                if !lower && name != s.floor {
                    out.push((n, format!("`{}` may not name `crate::{name}`", s.floor)));
                }
            }
            if line.contains(&"super::".repeat(depth)) {
                out.push((n, "climbs out of its floor; name it by `crate::`".to_owned()));
            }
        }
        out
    });
}

#[test]
fn dry_floors_are_functions_of_their_arguments() {
    // What they concluded must come out again from the same rows, years later, on any machine.
    let floors = floors();
    check(|s| {
        let mut out = Vec::new();
        if !floors.get(&s.floor).is_some_and(|f| f.dry) {
            return out;
        }
        for (n, line) in s.code.lines().enumerate() {
            for (word, why) in WET_WORDS.iter().filter(|(word, _)| says(line, word)) {
                out.push((n, format!("`{word}` on a dry floor: {why}")));
            }
            for name in UNSTEADY {
                if line.contains(&format!(".{name}(")) || line.contains(&format!("f64::{name}")) {
                    out.push((n, format!("`{name}` of std on a dry floor: use libm")));
                }
            }
        }
        out
    });
}

#[test]
fn each_outside_crate_has_its_home() {
    // A crate that is used everywhere cannot be replaced; one that is used in one place can.
    let sources = sources();
    check(|s| {
        let mut out = Vec::new();
        for (n, line) in s.code.lines().enumerate() {
            for (name, homes, why) in HOMES {
                if names(line, name) && !homes.iter().any(|home| s.path.starts_with(home)) {
                    out.push((n, format!("`{name}` lives in {}: {why}", homes.join(", "))));
                }
            }
        }
        out
    });
    for (name, homes, _) in HOMES {
        for home in *homes {
            let lives =
                |s: &Source| s.path.starts_with(home) && s.code.lines().any(|l| names(l, name));
            assert!(sources.iter().any(lives), "`{name}` does not live in {home} any more");
        }
    }
    let listed: BTreeSet<&str> = HOMES.iter().map(|(name, ..)| *name).collect();
    let manifest = read("Cargo.toml");
    let wanted = manifest.split("[dependencies]").nth(1).unwrap().split("\n[").next().unwrap();
    for line in wanted.lines().filter(|l| l.contains('=')) {
        let name = line.split(' ').next().unwrap().replace('-', "_");
        assert!(listed.contains(name.as_str()), "{name} has no home in this list, or no use");
    }
}

#[test]
fn no_value_of_json_without_a_type() {
    // The order of its keys depends on features that any crate of the build may switch on.
    check(|s| {
        let loose = |l: &str| {
            let imported = l.trim_start().starts_with("use serde_json");
            ["json!", "serde_json::Value", "serde_json::Map"].iter().any(|w| says(l, w))
                || imported && (says(l, "Value") || says(l, "Map"))
        };
        let lines = s.code.lines().enumerate().filter(|(_, l)| loose(l));
        lines.map(|(n, _)| (n, "give it a struct".to_owned())).collect()
    });
}

#[test]
fn one_door_a_floor() {
    // Outsiders see what `mod.rs` re-exports; everything else can change without them.
    check(|s| {
        let open = |l: &str| {
            let l = l.trim_start();
            s.path != "lib.rs" && l.starts_with("pub") && says(l, "mod")
        };
        let lines = s.code.lines().enumerate().filter(|(_, l)| open(l));
        lines.map(|(n, _)| (n, "submodules are private".to_owned())).collect()
    });
}

#[test]
fn a_file_is_read_in_one_sitting() {
    // Longer ones hold two things.
    check(|s| {
        let lines = s.code.trim_end().lines().count();
        let long = (lines > LINES_MOST).then(|| (lines, format!("{lines} lines without tests")));
        long.into_iter().collect()
    });
}

#[test]
fn every_migration_says_why() {
    // It outlives those who wrote it, and it cannot be changed afterwards.
    let files = files("migrations");
    for (at, path) in files.iter().enumerate() {
        assert!(read(path).starts_with("-- "), "{path} opens with no comment");
        let number = format!("migrations/{:04}_", at + 1);
        assert!(path.starts_with(&number), "{path} is out of order: {number} is wanted");
    }
}

#[test]
fn nothing_is_left_half_done() {
    // Whoever finds such a mark cannot tell whether it still holds: do it, or leave it out.
    let words = [
        concat!("TO", "DO"),
        concat!("FIX", "ME"),
        concat!("XX", "X"),
        concat!("to", "do!"),
        concat!("unimple", "mented!"),
        concat!("db", "g!"),
        concat!("#[ig", "nore"),
    ];
    let found = everywhere(|line| words.iter().find(|w| says(line, w)).map(|w| (*w).to_owned()));
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}

#[test]
fn no_path_of_one_machine() {
    // It means nothing to anybody else.
    let roots = ["work", "tmp", "root", "farm", "home", "mnt", "Users"];
    let found = everywhere(|line| {
        let path = |root: &&str| {
            let named = format!("/{root}");
            line.match_indices(&named).any(|(at, _)| {
                let before = line[..at].chars().next_back();
                let after = line[at + named.len()..].chars().next();
                !before.is_some_and(|c| is_word(c) || "./}".contains(c))
                    && !after.is_some_and(|c| is_word(c) || c == '-')
            })
        };
        roots.iter().find(|r| path(r)).map(|r| format!("a path under {r}"))
    });
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}

#[test]
fn comments_texts_and_tests_are_blanked() {
    let text = "a // b\n\"c\\\"d\" 'e' 'f r#\"g\"h\"# /* i\n j */ k\n#[cfg(test)]\nmod tests;\nl\n\
                #[cfg(test)]\nmod m {\n n { } \n}\no";
    let (code, test_modules) = strip(text);
    let kept: String = code.chars().filter(|c| c.is_alphanumeric()).collect();
    assert_eq!(kept, "afklo", "{code}");
    assert_eq!(code.lines().count(), text.lines().count());
    assert_eq!(test_modules, ["tests"]);
}

/// A floor of the picture.
struct Floor {
    number: u32,
    dry: bool,
}

/// The floors by name, from the picture in `src/lib.rs`.
fn floors() -> BTreeMap<String, Floor> {
    let text = read("src/lib.rs");
    let (mut out, mut dry) = (BTreeMap::new(), false);
    for line in text.lines().filter_map(|l| l.strip_prefix("//!")) {
        dry |= line.trim_start().starts_with("---");
        let mut words = line.split_whitespace().skip_while(|w| matches!(*w, "WET" | "DRY"));
        let Some(Ok(number)) = words.next().map(str::parse) else { continue };
        out.insert(words.next().unwrap().to_owned(), Floor { number, dry });
        while words.next() == Some("|") {
            out.insert(words.next().unwrap().to_owned(), Floor { number, dry });
        }
    }
    let modules = text.lines().filter_map(|l| l.strip_prefix("pub mod "));
    let modules: BTreeSet<String> = modules.map(|m| m.trim_end_matches(';').to_owned()).collect();
    assert!(modules.len() > 10 && modules.iter().eq(out.keys()), "the picture and the modules");
    out
}

/// The files of `src` that are not tests.
fn sources() -> Vec<Source> {
    let mut out = Vec::new();
    let mut tests = BTreeSet::new();
    for path in files("src") {
        let text = read(&path);
        let (code, test_modules) = strip(&text);
        let path = path.trim_start_matches("src/").to_owned();
        let folder = ["mod.rs", "lib.rs", "main.rs"].iter().find_map(|f| path.strip_suffix(f));
        let folder = folder.map_or_else(|| path.replace(".rs", "/"), str::to_owned);
        tests.extend(test_modules.iter().map(|m| format!("{folder}{m}")));
        let floor = path.split(['/', '.']).next().unwrap().to_owned();
        out.push(Source { path, floor, text, code });
    }
    let is_test = |path: &str| {
        tests
            .iter()
            .any(|t| path.strip_prefix(t.as_str()).is_some_and(|r| r.starts_with(['/', '.'])))
    };
    out.retain(|s| !is_test(&s.path));
    assert!(out.len() > 100, "only {} files", out.len());
    out
}

/// Fails with every place at which a rule does not hold. `rule` gives lines counted from 0.
fn check(rule: impl Fn(&Source) -> Vec<(usize, String)>) {
    let mut found = Vec::new();
    for s in sources() {
        for (n, what) in rule(&s) {
            let line = s.text.lines().nth(n).unwrap_or("").trim();
            found.push(format!("src/{}:{}: {what}\n    {line}", s.path, n + 1));
        }
    }
    assert!(found.is_empty(), "\n{}", found.join("\n"));
}

/// Every line of the project's text for which `rule` has something to say.
fn everywhere(rule: impl Fn(&str) -> Option<String>) -> Vec<String> {
    let mut out = Vec::new();
    for path in files("") {
        for (n, line) in read(&path).lines().enumerate() {
            out.extend(rule(line).map(|what| format!("{path}:{}: {what}", n + 1)));
        }
    }
    assert!(files("").len() > 150);
    out
}

/// Text files under a folder of the project, in order.
fn files(folder: &str) -> Vec<String> {
    const TEXT: [&str; 7] = ["rs", "sql", "toml", "md", "html", "css", "js"];
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let (mut out, mut folders) = (Vec::new(), vec![root.join(folder)]);
    while let Some(folder) = folders.pop() {
        for entry in fs::read_dir(&folder).unwrap().map(Result::unwrap) {
            let path = entry.path();
            let name = entry.file_name().into_string().unwrap();
            if path.is_dir() {
                if !matches!(name.as_str(), "target" | ".git") {
                    folders.push(path);
                }
            } else if TEXT.iter().any(|e| name.ends_with(&format!(".{e}"))) || name == "run" {
                let path = path.strip_prefix(root).unwrap().to_str().unwrap().replace('\\', "/");
                out.push(path);
            }
        }
    }
    out.sort();
    out
}

fn read(path: &str) -> String {
    fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join(path)).unwrap()
}

fn is_word(c: char) -> bool {
    c.is_alphanumeric() || c == '_'
}

/// Whether a line says a word, not as part of another.
fn says(line: &str, word: &str) -> bool {
    line.match_indices(word).any(|(at, _)| {
        let before = line[..at].chars().next_back().is_some_and(is_word);
        let after = line[at + word.len()..].chars().next().is_some_and(is_word);
        let ends = word.ends_with(is_word);
        !(before || after && ends)
    })
}

/// Whether a line names a crate: in a path, or in `use`.
fn names(line: &str, name: &str) -> bool {
    line.match_indices(&format!("{name}::")).any(|(at, _)| {
        let before = line[..at].chars().next_back();
        !before.is_some_and(|c| is_word(c) || c == ':')
    }) || line.trim_start().starts_with(&format!("use {name};"))
}
