//! Disks that are full or read-only, and places where nothing can be made.

use std::os::unix::fs::PermissionsExt;
use std::path::Path;
use std::process::{Command, Stdio};

use crate::absent::not_checked;
use crate::job::{Program, Scene, go_on_to_the_end, result_in, said, same};

/// A small file system in memory, while it lasts.
struct TinyDisk<'a> {
    at: &'a Path,
}

impl<'a> TinyDisk<'a> {
    /// Mounts it; `None` where that is not permitted, which is said aloud.
    fn mount(at: &'a Path, options: &str) -> Option<Self> {
        std::fs::create_dir_all(at).unwrap();
        let mounted = Command::new("mount")
            .args(["-t", "tmpfs", "-o", options, "none"])
            .arg(at)
            .stderr(Stdio::null())
            .status();
        if mounted.is_ok_and(|status| status.success()) {
            return Some(Self { at });
        }
        not_checked("a tiny disk cannot be mounted here (that takes root)");
        None
    }

    fn remount(&self, options: &str) {
        let status = Command::new("mount").args(["-o", options]).arg(self.at).status().unwrap();
        assert!(status.success());
    }
}

impl Drop for TinyDisk<'_> {
    fn drop(&mut self) {
        let _ = Command::new("umount").arg("-l").arg(self.at).status();
    }
}

#[test]
fn a_disk_that_fills_up_stops_nothing_and_loses_nothing() {
    let scene = Scene::new();
    let at = scene.run_folder();
    let Some(disk) = TinyDisk::mount(&at, "size=24k") else { return };
    let output = scene.command(Program::Drawtube, "--starts 40").output().unwrap();
    let told = said(&output);
    assert_eq!(output.status.code(), Some(7), "{told}");
    assert!(told.contains("CANNOT BE WRITTEN") && told.contains("last resort"), "{told}");
    let best: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    assert_eq!(best["format"], "drawtube/1", "standard output holds the best design alone");
    disk.remount("remount,size=4m");
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
}

#[test]
fn a_full_disk_is_told_at_once() {
    let scene = Scene::new();
    let at = scene.run_folder();
    let Some(_disk) = TinyDisk::mount(&at, "size=4k") else { return };
    let output = scene.command(Program::Drawtube, "--starts 1000000").output().unwrap();
    assert_eq!(output.status.code(), Some(7), "{}", said(&output));
    assert!(output.stdout.is_empty());
}

#[test]
fn a_read_only_disk_is_told_at_once_and_can_be_shown() {
    let scene = Scene::new();
    let at = scene.run_folder();
    let Some(disk) = TinyDisk::mount(&at, "size=4m") else { return };
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
    disk.remount("remount,ro");
    let output = scene.command(Program::Drawtube, "--starts 1000000").output().unwrap();
    assert_eq!(output.status.code(), Some(7), "{}", said(&output));
    let show = scene.other("overnight --run run --show");
    assert_eq!(show.status.code(), Some(0), "{}", said(&show));
    same(&scene.result()).unwrap();
}

#[test]
fn a_folder_without_permission_is_told_at_once() {
    let scene = Scene::new();
    let at = scene.run_folder();
    std::fs::create_dir(&at).unwrap();
    std::fs::set_permissions(&at, std::fs::Permissions::from_mode(0o555)).unwrap();
    if std::fs::create_dir(at.join("probe")).is_ok() {
        // Whoever runs this writes where permissions forbid it: the read-only disk stands for it.
        return;
    }
    let output = scene.command(Program::Drawtube, "").output().unwrap();
    assert_eq!(output.status.code(), Some(7), "{}", said(&output));
}

#[test]
fn places_where_nothing_can_be_made_are_told_and_left_alone() {
    let refused = |prepare: &dyn Fn(&Scene), status: i32, told: &str| {
        let scene = Scene::new();
        prepare(&scene);
        let before = result_in(&scene.run_folder());
        let output = scene.command(Program::Drawtube, "").output().unwrap();
        assert_eq!(output.status.code(), Some(status), "{}", said(&output));
        assert!(said(&output).contains(told), "{}", said(&output));
        assert_eq!(result_in(&scene.run_folder()), before);
    };
    let file = |scene: &Scene, name: &str| crate::job::write(&scene.path().join(name), b"mine");
    let folder = |scene: &Scene, name: &str| {
        std::fs::create_dir_all(scene.path().join(name)).unwrap();
    };
    refused(&|scene| file(scene, "run"), 7, "run: ");
    refused(
        &|scene| {
            folder(scene, "run");
            file(scene, "run/notes.txt");
        },
        6,
        "has no run.json and holds other things, such as \"notes.txt\"",
    );
    refused(&|scene| folder(scene, "run/journal.jsonl"), 6, "journal.jsonl");
    refused(&|scene| folder(scene, "run/run.json"), 7, "run.json");
    let scene = Scene::new();
    let output = scene.other("overnight design.json --run no/such/run --starts 1");
    assert_eq!(output.status.code(), Some(7), "{}", said(&output));
    let output = scene.other("overnight --run no/such/run --show");
    assert_eq!(output.status.code(), Some(6), "{}", said(&output));
}
