import hashlib
from io import BytesIO
from itertools import product

import numpy as np
from PIL import Image, ImageCms

from creditdesk.memo.srgb import srgb_profile


def test_it_converts_as_another_srgb_profile_does() -> None:
    # outside check: Little CMS (through Pillow) with its own built-in sRGB profile
    ours = ImageCms.ImageCmsProfile(BytesIO(srgb_profile()))
    colours = np.array(list(product(range(0, 256, 15), repeat=3)), dtype=np.uint8).reshape(1, -1, 3)
    picture = Image.fromarray(colours)
    change = ImageCms.buildTransform(ours, ImageCms.createProfile("sRGB"), "RGB", "RGB")
    turned = ImageCms.applyTransform(picture, change)
    assert turned is not None
    assert np.abs(np.asarray(turned).astype(int) - colours.astype(int)).max() <= 1


def test_its_primaries_follow_from_the_standard() -> None:
    # IEC 61966-2-1: chromaticities of the primaries and of D65; adapted to D50 by the linear Bradford matrix
    corners = np.array([[x / y, 1, (1 - x - y) / y] for x, y in ((0.64, 0.33), (0.30, 0.60), (0.15, 0.06))]).T
    white, d50 = np.array([0.3127 / 0.3290, 1, (1 - 0.3127 - 0.3290) / 0.3290]), np.array([0.9642, 1.0, 0.8249])
    bradford = np.array([[0.8951, 0.2664, -0.1614], [-0.7502, 1.7135, 0.0367], [0.0389, -0.0685, 1.0296]])
    adapt = np.linalg.inv(bradford) @ np.diag((bradford @ d50) / (bradford @ white)) @ bradford
    wanted = adapt @ (corners * np.linalg.solve(corners, white))
    profile = ImageCms.ImageCmsProfile(BytesIO(srgb_profile())).profile
    found = np.array([profile.red_colorant[0], profile.green_colorant[0], profile.blue_colorant[0]]).T
    assert np.abs(found - wanted).max() < 3e-4


def test_its_bytes_never_change() -> None:
    assert (
        hashlib.sha256(srgb_profile()).hexdigest() == "cbc3cc5ba9bb1073bd6ff9470cc85bd4aa2039dea638666656b99b64a1ef6e03"
    )
