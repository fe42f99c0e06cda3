//! The shape of the source, read from the source: which module may use which, how long a file may be, what a `mod.rs`
//! may hold, how large a data file may be. What belongs here: rules about the code that the compiler does not hold.

use std::fs;
use std::path::{Path, PathBuf};

/// The modules of the crate by level: a module uses only itself and modules on lower levels. Modules on one level never
/// use each other.
const LEVELS: [&[&str]; 12] = [
    &["units"],
    &["numerics"],
    &["theory", "statistics"],
    &["frames"],
    &["sheet"],
    &["measurements"],
    &["estimates"],
    &["fits"],
    &["parameters"],
    &["report"],
    &["pipeline", "mint"],
    &["cli"],
];

/// Longest source file, in lines.
const MOST_LINES: usize = 450;

/// Largest file in the repository, in bytes.
const MOST_BYTES: u64 = 3_000_000;

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// Every file below a folder, sorted; folders of results are left out.
fn files_below(folder: &Path) -> Vec<PathBuf> {
    let mut entries: Vec<PathBuf> = fs::read_dir(folder)
        .unwrap_or_else(|error| panic!("{}: {error}", folder.display()))
        .map(|entry| entry.expect("a readable entry").path())
        .collect();
    entries.sort();
    entries
        .into_iter()
        .filter(|path| path.extension().is_none_or(|extension| extension != "out"))
        .flat_map(|path| {
            if path.is_dir() {
                files_below(&path)
            } else {
                vec![path]
            }
        })
        .collect()
}

fn rust_files(folder: &str) -> Vec<(PathBuf, String)> {
    let files: Vec<(PathBuf, String)> = files_below(&root().join(folder))
        .into_iter()
        .filter(|path| path.extension().is_some_and(|extension| extension == "rs"))
        .map(|path| {
            let text =
                fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()));
            (path, text)
        })
        .collect();
    assert!(!files.is_empty(), "{folder} holds Rust files");
    files
}

/// The code of a file: comments and `#[cfg(test)]` modules left out.
fn code_without_tests(text: &str) -> String {
    let without_comments: String = text
        .lines()
        .map(|line| line.split_once("//").map_or(line, |(code, _)| code))
        .flat_map(|line| [line, "\n"])
        .collect();
    let mut code = String::new();
    let mut rest = without_comments.as_str();
    while let Some((before, after)) = rest.split_once("#[cfg(test)]") {
        code.push_str(before);
        let ends_without_body =
            after.find(';').unwrap_or(after.len()) < after.find('{').unwrap_or(after.len());
        rest = if ends_without_body {
            after.split_once(';').map_or("", |(_, rest)| rest)
        } else {
            after_block(after)
        };
    }
    code.push_str(rest);
    code
}

/// What follows the first `{ ... }` of a text.
fn after_block(text: &str) -> &str {
    let mut depth = 0_usize;
    for (place, character) in text.char_indices() {
        match character {
            '{' => depth += 1,
            '}' => {
                depth -= 1;
                if depth == 0 {
                    return &text[place + 1..];
                }
            }
            _ => {}
        }
    }
    ""
}

fn leading_identifier(text: &str) -> &str {
    let end = text
        .find(|c: char| !c.is_alphanumeric() && c != '_')
        .unwrap_or(text.len());
    &text[..end]
}

/// The names right after a path's start: one, or those of a group `{a::b, c::{d, e}}`.
fn names_after(text: &str) -> Vec<&str> {
    let Some(group) = text.strip_prefix('{') else {
        return vec![leading_identifier(text)];
    };
    let mut names = Vec::new();
    let mut depth = 0_usize;
    let mut start = true;
    for (place, character) in group.char_indices() {
        match character {
            '{' => depth += 1,
            '}' if depth == 0 => break,
            '}' => depth -= 1,
            ',' if depth == 0 => start = true,
            c if start && !c.is_whitespace() => {
                names.push(leading_identifier(&group[place..]));
                start = false;
            }
            _ => {}
        }
    }
    names
}

/// Top-level modules that a file's code names, through `crate::` or through enough `super::` to reach the root.
/// `depth` is the number of modules the file lies below the root.
fn modules_used(code: &str, depth: usize) -> Vec<String> {
    let mut used = Vec::new();
    let mut from_root = |prefix: &str| {
        for (place, _) in code.match_indices(prefix) {
            let before = code[..place].chars().next_back();
            if before.is_none_or(|c| !c.is_alphanumeric() && c != '_' && c != ':') {
                used.extend(
                    names_after(&code[place + prefix.len()..])
                        .into_iter()
                        .map(str::to_owned),
                );
            }
        }
    };
    from_root("crate::");
    from_root(&"super::".repeat(depth));
    used
}

fn level_of(module: &str) -> Option<usize> {
    LEVELS.iter().position(|level| level.contains(&module))
}

/// The names of the modules from the root to a source file: `src/sheet/mod.rs` is `[sheet]`.
fn module_path(file: &Path) -> Vec<String> {
    let relative = file
        .strip_prefix(root().join("src"))
        .expect("below src")
        .with_extension("");
    let mut names: Vec<String> = relative
        .components()
        .map(|part| part.as_os_str().to_string_lossy().into_owned())
        .collect();
    names.pop_if(|last| last == "mod");
    names
}

#[test]
fn modules_use_only_what_lies_below_them() {
    let mut offences = Vec::new();
    for (path, text) in rust_files("src") {
        let names = module_path(&path);
        let module = names[0].as_str();
        if module == "lib" || module == "main" {
            continue;
        }
        let Some(level) = level_of(module) else {
            offences.push(format!("module {module} has no level: give it a place in LEVELS"));
            continue;
        };
        for used in modules_used(&code_without_tests(&text), names.len()) {
            let allowed = used == module || level_of(&used).is_some_and(|below| below < level);
            if !allowed {
                offences.push(format!(
                    "{} uses {used}, which does not lie below {module}",
                    path.display()
                ));
            }
        }
    }
    assert!(offences.is_empty(), "{}", offences.join("\n"));
}

#[test]
fn the_binary_knows_only_the_command_line() {
    let text = fs::read_to_string(root().join("src/main.rs")).expect("src/main.rs");
    let code = code_without_tests(&text);
    for (place, _) in code.match_indices("planish::") {
        let names = names_after(&code[place + "planish::".len()..]);
        assert!(
            names.iter().all(|name| *name == "cli"),
            "src/main.rs uses {names:?}"
        );
    }
}

#[test]
fn source_files_are_short_and_say_what_they_hold() {
    let mut offences = Vec::new();
    for (path, text) in rust_files("src").into_iter().chain(rust_files("tests")) {
        let lines = text.lines().count();
        if lines > MOST_LINES {
            offences.push(format!(
                "{} has {lines} lines, more than {MOST_LINES}",
                path.display()
            ));
        }
        if !text.starts_with("//!") {
            offences.push(format!(
                "{} does not start with a //! comment on what it holds",
                path.display()
            ));
        }
    }
    assert!(offences.is_empty(), "{}", offences.join("\n"));
}

/// Bodies of functions in a `mod.rs`: only a registry's.
#[test]
fn module_roots_hold_no_logic() {
    let mut offences = Vec::new();
    for (path, text) in rust_files("src") {
        if path.file_name().is_none_or(|name| name != "mod.rs") {
            continue;
        }
        offences.extend(
            functions_with_bodies(&code_without_tests(&text))
                .into_iter()
                .filter(|name| name != "registry")
                .map(|name| {
                    format!(
                        "{} holds the body of `{name}`: move it to a file of its own",
                        path.display()
                    )
                }),
        );
    }
    assert!(offences.is_empty(), "{}", offences.join("\n"));
}

fn functions_with_bodies(code: &str) -> Vec<String> {
    code.match_indices("fn ")
        .filter(|(place, _)| code[..*place].chars().next_back().is_none_or(char::is_whitespace))
        .filter(|(place, _)| {
            // An array type in a signature, `[f64; 2]`, holds a semicolon that ends nothing.
            let mut brackets = 0_usize;
            code[*place..]
                .chars()
                .find(|&character| {
                    match character {
                        '[' | '(' => brackets += 1,
                        ']' | ')' => brackets -= 1,
                        _ => {}
                    }
                    brackets == 0 && (character == ';' || character == '{')
                })
                .is_some_and(|character| character == '{')
        })
        .map(|(place, found)| leading_identifier(&code[place + found.len()..]).to_owned())
        .collect()
}

#[test]
fn data_files_stay_small() {
    for folder in ["src", "tests", "benches", "pipelines", "demo-trajectories"] {
        for path in files_below(&root().join(folder)) {
            let bytes = fs::metadata(&path).expect("a readable file").len();
            assert!(
                bytes <= MOST_BYTES,
                "{} has {bytes} bytes, more than {MOST_BYTES}",
                path.display()
            );
        }
    }
}

/// The reading above, on code made for it: what must be found is found, what must not is not.
#[test]
fn paths_are_found_wherever_they_stand() {
    let text = "
        use crate::frames::Frame; // crate::report::Page
        use crate::{cli, sheet::{ModeSet, Surface}};
        use super::super::fits::Fit;
        fn f(x: [f64; 2]) -> crate::units::Area { super::neighbour() }
        fn declared(x: [f64; 2]) -> f64;
        #[cfg(test)]
        mod tests { use crate::pipeline::Plan; fn g() {} }
        use crate::theory::PlaneCell;
        #[cfg(test)]
        mod elsewhere;
        fn last() {}
    ";
    let code = code_without_tests(text);
    assert_eq!(
        modules_used(&code, 2),
        ["frames", "cli", "sheet", "units", "theory", "fits"]
    );
    assert_eq!(functions_with_bodies(&code), ["f", "last"]);
}
