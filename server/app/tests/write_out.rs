//! `indexwise write-out` as a user meets it: the place, the paper around it, the layout, exit statuses.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod run;

use run::Folder;

const SHEET: &str = "\\documentclass{article}\n\
                     % indexwise: i j run from 1 to 2; F_{ij} is antisymmetric; T_{ij} is symmetric\n\
                     \\begin{document}\n\
                     \\[ S = F_{ij} F^{ij} + T_{ij} T^{ij} \\]\n\
                     Only words.\n\
                     \\end{document}\n";

#[track_caller]
fn prints(folder: &Folder, line: &str, want: &str) {
    let answer = folder.run(line);
    assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{line}");
    assert_eq!(answer.out, want, "{line}");
}

#[track_caller]
fn complains(folder: &Folder, line: &str, status: i32, want: &str) {
    let answer = folder.run(line);
    assert_eq!((answer.status, answer.out.as_str()), (status, ""), "{line}");
    assert_eq!(answer.err, format!("indexwise: {want}\n"), "{line}");
}

#[test]
fn the_page_says_what_was_summed_and_what_is_left() {
    let folder = Folder::new(&[("sheet.tex", SHEET.as_bytes())]);
    let want = "\
sheet.tex, line 4
    F_{ij} F^{ij}

    i runs over 1 2  (declared)
    j runs over 1 2  (declared)

    =   2 F_{12} F^{12}

    LaTeX  2 F_{12} F^{12}
    note   2 F_12 F^12

    4 terms, of which 2 vanish; by symmetry the others are 1.
    Zero factors: F_{11}, F_{22}
";
    prints(&folder, "write-out sheet.tex:4:9", want);
}

#[test]
fn one_way_of_writing_is_printed_alone() {
    let folder = Folder::new(&[("sheet.tex", SHEET.as_bytes())]);
    let second = "T_{11} T^{11} + 2 T_{12} T^{12} + T_{22} T^{22}\n";
    for way in ["latex", "unicode"] {
        prints(&folder, &format!("write-out sheet.tex:4:25 --as {way}"), second);
    }
    prints(&folder, "write-out --as note sheet.tex:4:25", "T_11 T^11 + 2 T_12 T^12 + T_22 T^22\n");
    complains(
        &folder,
        "write-out sheet.tex:4:9 --as words",
        2,
        "invalid value 'words' for '--as <WAY>' [possible values: latex, unicode, note]",
    );
}

#[test]
fn nothing_to_write_out_is_status_1() {
    let folder = Folder::new(&[("sheet.tex", SHEET.as_bytes())]);
    complains(&folder, "write-out sheet.tex:5:3", 1, "sheet.tex:5:3: no formula stands there");
    complains(&folder, "write-out sheet.tex:4:4", 1, "sheet.tex:4:4: no summed index stands there");
}

#[test]
fn a_place_that_is_none_is_trouble() {
    let folder = Folder::new(&[("sheet.tex", SHEET.as_bytes()), ("parts/a.tex", b"x")]);
    complains(&folder, "write-out sheet.tex", 2, "sheet.tex: say the place as FILE:LINE:COLUMN");
    complains(&folder, "write-out gone.tex:1:1", 2, "gone.tex: not found");
    complains(&folder, "write-out parts:1:1", 2, "parts: is a folder");
    complains(&folder, "write-out -- -:1:1", 2, "-: a place is looked for in a file, not in standard input");
    complains(&folder, "write-out sheet.tex:9:1", 2, "sheet.tex: has 7 lines, no line 9");
    complains(&folder, "write-out sheet.tex:5:30", 2, "sheet.tex: line 5 has 11 columns, no column 30");
    complains(&folder, "write-out sheet.tex:four:1", 2, "sheet.tex:four:1: \"four\" is no line; they count from 1");
}

#[test]
fn a_part_has_the_macros_and_conventions_of_its_paper_and_project() {
    let root = b"\\documentclass{article}\\usepackage{sheet}\n% indexwise: T_{\\mu\\nu} is symmetric\n\
                 \\begin{document}\\input{part}\\end{document}";
    let folder = Folder::new(&[
        ("main.tex", root),
        ("sheet.sty", b"\\newcommand{\\met}{g^{\\mu\\nu}}"),
        ("part.tex", "Größe: $S = \\met T_{\\mu\\nu}$\n".as_bytes()),
        ("indexwise.toml", b"[conventions]\nlines = ['\\mu \\nu run over t r']\n"),
    ]);
    let want = "g^{tt} T_{tt} + 2 g^{tr} T_{tr} + g^{rr} T_{rr}\n";
    prints(&folder, "write-out part.tex:1:18 --as latex", want);
    std::fs::write(folder.path().join("other.txt"), "\\mu \\nu run over u v\n").unwrap();
    prints(
        &folder,
        "write-out part.tex:1:18 --as latex --conventions other.txt",
        &want.replace('t', "u").replace('r', "v"),
    );
    std::fs::write(folder.path().join("indexwise.toml"), "x").unwrap();
    assert_eq!(folder.run("write-out part.tex:1:18").status, 2);
}

#[test]
fn pages_and_notes() {
    let page = "# Page\n\nWith $e = \\frac{1}{2} u_i u_i$.\n";
    let note = "Notes\n\n  e = 1/2 u_i u_i\n";
    let folder = Folder::new(&[("page.md", page.as_bytes()), ("sheet.inote", note.as_bytes())]);
    let want = "\\frac{1}{2} u_1 u_1 + \\frac{1}{2} u_2 u_2 + \\frac{1}{2} u_3 u_3\n";
    prints(&folder, "write-out page.md:3:23 --as latex", want);
    prints(&folder, "write-out sheet.inote:3:13 --as note", "1/2 u_1 u_1 + 1/2 u_2 u_2 + 1/2 u_3 u_3\n");
    let answer = folder.run("write-out sheet.inote:3:13");
    assert!(answer.out.contains("i runs over 1 2 3  (by custom; no range is declared)"), "{}", answer.out);
}

#[test]
fn a_sum_that_is_too_long_is_refused_with_its_length() {
    let page = "<!-- indexwise: i j k run from 1 to 20 -->\n\n$e = A_{ij} B_{jk} C_{ki}$\n";
    let folder = Folder::new(&[("page.md", page.as_bytes())]);
    let want = "page.md:3:6: the sum has 8000 terms, more than the budget of 256";
    complains(&folder, "write-out page.md:3:6", 1, want);
}

#[test]
fn the_example_of_the_readme_is_real() {
    let root = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../..");
    let place = "tests/documents/field-notes.inote:34:22";
    let mut command = std::process::Command::new(env!("CARGO_BIN_EXE_indexwise"));
    let output = command.current_dir(&root).args(["write-out", place]).output().unwrap();
    let readme = std::fs::read_to_string(root.join("README.md")).unwrap();
    let shown = format!("```\nindexwise write-out {place}\n\n{}```\n", String::from_utf8(output.stdout).unwrap());
    assert!(output.status.success() && readme.contains(&shown), "the README should say:\n{shown}");
}
