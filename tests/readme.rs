//! Every command shown in README is run, and prints what README shows.

use std::process::Command;

#[test]
fn commands_print_what_readme_shows() {
    let readme = include_str!("../README.md");
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("readme");
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).unwrap();
    let mut shown = 0;
    for block in readme.split("```text\n").skip(1).filter_map(|b| b.split("\n```").next()) {
        let Some((call, output)) = block.strip_prefix("$ ").and_then(|b| b.split_once('\n')) else { continue };
        let run = match call.strip_prefix("interstice ") {
            Some(rest) => {
                let words: Vec<String> = rest.split_whitespace().map(|w| w.trim_matches('"').to_string()).collect();
                Command::new(env!("CARGO_BIN_EXE_interstice")).args(words).current_dir(&folder).output().unwrap()
            }
            None => Command::new("sh").args(["-c", call]).current_dir(&folder).output().unwrap(),
        };
        assert!(run.status.success(), "{call}: {}", String::from_utf8_lossy(&run.stderr));
        assert_eq!(String::from_utf8(run.stdout).unwrap().trim_end(), output.trim_end(), "{call}");
        shown += 1;
    }
    assert!(shown >= 4, "README shows {shown} commands with their output");
}
