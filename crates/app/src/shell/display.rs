//! What can keep a window from opening, found out before anything can fail loudly.

/// One line for a person where no window can be opened here, `None` where one probably can.
pub fn obstacle() -> Option<String> {
    if cfg!(not(target_os = "linux")) {
        return None;
    }
    let set = |name: &str| std::env::var_os(name).is_some_and(|value| !value.is_empty());
    let wayland = set("WAYLAND_DISPLAY") || set("WAYLAND_SOCKET");
    let x11 = set("DISPLAY");
    if !wayland && !x11 {
        return Some("no display (neither WAYLAND_DISPLAY nor DISPLAY is set)".to_owned());
    }
    if wayland {
        return None;
    }
    // These are opened at run time; where one is missing, the window toolkit panics or gives an opaque error.
    let needed = [
        ("libX11.so.6", "libx11-6"),
        ("libX11-xcb.so.1", "libx11-xcb1"),
        ("libXcursor.so.1", "libxcursor1"),
        ("libXi.so.6", "libxi6"),
        ("libxkbcommon-x11.so.0", "libxkbcommon-x11-0"),
    ];
    let missing: Vec<&str> =
        needed.iter().filter(|(library, _)| !is_installed(library)).map(|(_, package)| *package).collect();
    (!missing.is_empty()).then(|| {
        format!("libraries for a window are missing (on Debian: apt-get install {})", missing.join(" "))
    })
}

/// Whether the dynamic linker would find a shared library. Errs on the side of yes.
fn is_installed(library: &str) -> bool {
    let folders = ["/usr/lib", "/usr/lib64", "/lib", "/lib64", "/usr/local/lib"];
    let triplet = match std::env::consts::ARCH {
        "x86_64" => "x86_64-linux-gnu",
        "aarch64" => "aarch64-linux-gnu",
        "x86" => "i386-linux-gnu",
        _ => return true,
    };
    let extra = std::env::var("LD_LIBRARY_PATH").unwrap_or_default();
    let unusual = std::path::Path::new("/nix").exists() || std::path::Path::new("/gnu").exists();
    unusual
        || extra
            .split(':')
            .filter(|folder| !folder.is_empty())
            .any(|f| std::path::Path::new(f).join(library).exists())
        || folders.iter().any(|folder| {
            let folder = std::path::Path::new(folder);
            folder.join(library).exists() || folder.join(triplet).join(library).exists()
        })
}
