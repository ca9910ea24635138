"""Programs that remake the numbers shipped in exptime/tables/data; nothing imports them."""
