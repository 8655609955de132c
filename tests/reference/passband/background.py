"""Black-body radiance behind a rectangular filter: W m^-2 sr^-1, with mpmath."""

import mpmath as mp

H, C, K = mp.mpf("6.62607015e-34"), mp.mpf(299792458), mp.mpf("1.380649e-23")


def radiance(low_nm, high_nm, kelvin):
    """Integral of B_lambda over a band of vacuum wavelengths."""

    def planck(m):
        return 2 * H * C**2 / m**5 / mp.expm1(H * C / (m * K * kelvin))

    return mp.quad(planck, [low_nm * mp.mpf("1e-9"), high_nm * mp.mpf("1e-9")])


if __name__ == "__main__":
    print("centre_nm,fwhm_nm,temperature_k,radiance_w_per_m2_sr")
    for centre in ("500", "668"):
        for width in ("1", "10"):
            for kelvin in (1500, 2500, 3500):
                c, w = mp.mpf(centre), mp.mpf(width)
                # Filters are specified in air: n = 1.000278 at both, to 1e-6 (Ciddor 1996).
                n = mp.mpf("1.000278")
                value = radiance((c - w / 2) * n, (c + w / 2) * n, kelvin)
                print(f"{centre},{width},{kelvin},{mp.nstr(value, 12)}")
