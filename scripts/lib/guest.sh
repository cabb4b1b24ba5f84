# Sourced after packages.sh: the kernel and the initramfs of the small guest, under build/guest.
# shellcheck shell=bash

guest=build/guest
# In the order of their dependencies.
guest_modules=(
    virtio_ring virtio virtio_pci_legacy_dev virtio_pci_modern_dev virtio_pci virtio_console
    evdev psmouse uinput hid usb-common usbcore xhci-hcd xhci-pci hid-generic usbhid
)

# fetch_kernel: Debian's kernel, unpacked into build/guest/kernel as vmlinuz and modules/.
fetch_kernel() {
    local package folder=$guest/download module
    [[ ! -e $guest/kernel/complete ]] || return 0
    package=$(kernel_package)
    if [[ -z $package ]]; then
        as_root apt-get -q update
        package=$(kernel_package)
    fi
    rm -rf "$guest/kernel" "$folder"
    mkdir -p "$guest/kernel/modules" "$folder/unpacked"
    (cd "$folder" && apt-get -q -o APT::Sandbox::User="$(id -un)" download "$package")
    dpkg-deb --fsys-tarfile "$folder/$package"_*.deb |
        tar -x -C "$folder/unpacked" --wildcards './boot/vmlinuz-*' './lib/modules/*/kernel/drivers/*'
    cp "$folder"/unpacked/boot/vmlinuz-* "$guest/kernel/vmlinuz"
    for module in "${guest_modules[@]}"; do
        cp "$(find "$folder/unpacked/lib/modules" -name "$module.ko" | head -n 1)" \
            "$guest/kernel/modules/"
    done
    printf '%s\n' "$package" >"$guest/kernel/complete"
    rm -rf "$folder"
}

# kernel_package: the package that linux-image-amd64 stands for.
kernel_package() {
    apt-cache depends linux-image-amd64 2>/dev/null |
        sed -n 's/^ *Depends: \(linux-image-.*\)/\1/p' | head -n 1
}

# make_initramfs PROGRAM...: busybox, the programs with their libraries, the modules, the recordings
# of build/guest/recordings and tests/guest/init.
make_initramfs() {
    local root=$guest/root program library
    rm -rf "$root"
    mkdir -p "$root/bin" "$root/modules" "$root/usr/share/zoneinfo" "$root/etc"
    cp tests/guest/init "$root/init"
    chmod +x "$root/init"
    cp "$(command -v busybox)" "$root/bin/busybox"
    ln -s busybox "$root/bin/sh"
    cp "$guest"/kernel/modules/*.ko "$root/modules/"
    cp -r "$guest/recordings" "$root/recordings"
    printf '%s\n' "${guest_modules[@]}" >"$root/modules/order"
    cp -r /usr/share/zoneinfo/{UTC,Etc} "$root/usr/share/zoneinfo/"
    [[ ! -e /usr/share/zoneinfo/tzdata.zi ]] ||
        cp /usr/share/zoneinfo/tzdata.zi "$root/usr/share/zoneinfo/"
    ln -s /usr/share/zoneinfo/Etc/UTC "$root/etc/localtime"
    for program in "$@"; do
        strip -o "$root/bin/${program##*/}" "$program"
        while read -r library; do
            [[ -e $root$library ]] || {
                mkdir -p "$root${library%/*}"
                cp -L "$library" "$root$library"
            }
        done < <(ldd "$program" | grep -oE '/[^ ]+')
    done
    (cd "$root" && find . | cpio --quiet -o -H newc -R 0:0) | zstd -q -3 -f -o "$guest/initramfs"
}
