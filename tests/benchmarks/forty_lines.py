"""A workbook of 40 lines and 27 entries, and the same lines written by hand three times.

The lines are those of an ordinary small calculation: wind on a frame, the floor it carries, one
concrete beam, its deflection and a column. They measure speed and are no method to design by.
"""

# ruff: noqa: N803, N806, PLR0917  the symbols are those of the formulas, one argument an entry

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook import codes
from calcbook.units import unit
from calcbook.workbook import Workbook

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    import pint

Array = np.ndarray

ENTRIES = {
    "V": ("70 m/s", "speed"), "rho": ("1.225 kg/m3", "density"), "K_zt": ("1.0", "number"),
    "K_d": ("0.85", "number"), "h": ("15.6 m", "length"), "z_g": ("274 m", "length"),
    "alpha": ("9.5", "number"), "G": ("0.85", "number"), "C_w": ("0.8", "number"),
    "C_l": ("-0.5", "number"), "GC_pi": ("0.18", "number"), "L": ("8.4 m", "length"),
    "s": ("3 m", "length"), "t_s": ("125 mm", "section length"),
    "gamma_c": ("24 kN/m3", "unit weight"), "q_sd": ("1.2 kN/m2", "pressure"),
    "q_l": ("2.4 kN/m2", "pressure"), "K_LL": ("2", "number"), "n": ("4", "number"),
    "b": ("350 mm", "section length"), "d": ("540 mm", "section length"),
    "f_c": ("28 MPa", "stress"), "f_y": ("415 MPa", "stress"), "A_s": ("2400 mm2", "area"),
    "E_s": ("200 GPa", "stress"), "theta": ("15 deg", "angle"), "c": ("450 mm", "section length"),
}  # fmt: skip

# fmt: off
LINES: tuple[tuple[str, str | list[tuple[str, str]]], ...] = (
    ("K_h", "2.01*(max(h, '4.6 m')/z_g)**(2/alpha)"),
    ("q_h", "0.5*rho*K_h*K_zt*K_d*V**2"),
    ("p_w", "q_h*G*C_w"),
    ("p_l", "q_h*G*C_l"),
    ("p_i", "q_h*GC_pi"),
    ("p_net", "p_w - p_l"),
    ("p_max", "max(p_w + p_i, p_net)"),
    ("V_w", "p_net*s*h"),
    ("M_w", "V_w*h/2"),
    ("N_w", "M_w/L"),
    ("A_T", "L*s"),
    ("A_I", "K_LL*A_T"),
    ("R_L", [("A_I > '37.2 m2'", "max(0.25 + '4.57 m'/sqrt(A_I), 0.4)"),
             ("A_I <= '37.2 m2'", "1")]),
    ("q_lr", "R_L*q_l"),
    ("w_s", "gamma_c*t_s"),
    ("w_b", "gamma_c*b*d"),
    ("w_d", "(w_s + q_sd)*s + w_b"),
    ("w_l", "q_lr*s"),
    ("w_u", "max(1.4*w_d, 1.2*w_d + 1.6*w_l)"),
    ("M_u", "w_u*L**2/8"),
    ("V_u", "w_u*L/2"),
    ("beta_1", [("f_c <= '28 MPa'", "0.85"),
                ("f_c > '28 MPa'", "max(0.85 - 0.05*(f_c - '28 MPa')/'7 MPa', 0.65)")]),
    ("a", "A_s*f_y/(0.85*f_c*b)"),
    ("x", "a/beta_1"),
    ("eps_t", "0.003*(d - x)/x"),
    ("phi", "where(eps_t >= 0.005, 0.9, max(0.65 + (eps_t - 0.002)*250/3, 0.65))"),
    ("M_n", "A_s*f_y*(d - a/2)"),
    ("M_c", "phi*M_n"),
    ("u_M", "M_u/M_c"),
    ("E_c", "4700*sqrt(f_c)"),
    ("n_e", "E_s/E_c"),
    ("r_s", "A_s/(b*d)"),
    ("k", "sqrt(2*r_s*n_e + (r_s*n_e)**2) - r_s*n_e"),
    ("I_cr", "b*(k*d)**3/3 + n_e*A_s*(d - k*d)**2"),
    ("v_d", "5*(w_d + w_l)*L**4/(384*E_c*I_cr)"),
    ("u_v", "v_d/(L/240)"),
    ("P_u", "n*(1.2*w_d + 1.6*w_l)*L + abs(N_w)"),
    ("A_g", "c**2"),
    ("u_P", "P_u/(0.52*(0.85*f_c*(A_g - A_s) + f_y*A_s))"),
    ("l_r", "L/2/cos(theta)"),
)
# fmt: on
AS_PRINTED: Mapping[str, dict[str, Any]] = {"E_c": {"takes": {"f_c": "MPa"}, "gives": "MPa"}}


def workbook() -> Workbook:
    """Return the workbook of 40 lines, evaluated once."""
    book = Workbook("forty-lines", "Forty lines", code=codes.get("NSCP 2015"))
    with book.section("Entries") as section:
        for name, (text, kind) in ENTRIES.items():
            section.entry(name, name, text, unit=kind)
    with book.section("Lines") as section:
        for name, formula in LINES:
            if isinstance(formula, str):
                section.line(f"{name} = {formula}", name, **AS_PRINTED.get(name, {}))
            else:
                section.line(name, name, cases=formula)
    book.evaluate()
    return book


def quantities(registry: pint.UnitRegistry[Any]) -> dict[str, Any]:
    """Return the entries as pint quantities in the units they are typed in."""
    return {name: _quantity(text, registry) for name, (text, _) in ENTRIES.items()}


def _quantity(text: str, registry: pint.UnitRegistry[Any]) -> Any:
    number, _, word = text.partition(" ")
    for power in "23":
        word = word.replace(f"m{power}", f"m**{power}")
    return registry.Quantity(float(number), word)


def si_factors() -> dict[str, float]:
    """Return the factor of each entry's typed unit to coherent SI."""
    return {name: unit(text.partition(" ")[2]).factor for name, (text, _) in ENTRIES.items()}


def on_floats(
    V: float, rho: float, K_zt: float, K_d: float, h: float, z_g: float, alpha: float, G: float,
    C_w: float, C_l: float, GC_pi: float, L: float, s: float, t_s: float, gamma_c: float,
    q_sd: float, q_l: float, K_LL: float, n: float, b: float, d: float, f_c: float, f_y: float,
    A_s: float, E_s: float, theta: float, c: float,
) -> tuple[float, ...]:  # fmt: skip
    """Compute the 40 lines as one would on floats in coherent SI."""
    K_h = 2.01 * (max(h, 4.6) / z_g) ** (2 / alpha)
    q_h = 0.5 * rho * K_h * K_zt * K_d * V**2
    p_w = q_h * G * C_w
    p_l = q_h * G * C_l
    p_i = q_h * GC_pi
    p_net = p_w - p_l
    p_max = max(p_w + p_i, p_net)
    V_w = p_net * s * h
    M_w = V_w * h / 2
    N_w = M_w / L
    A_T = L * s
    A_I = K_LL * A_T
    R_L = max(0.25 + 4.57 / math.sqrt(A_I), 0.4) if A_I > 37.2 else 1.0
    q_lr = R_L * q_l
    w_s = gamma_c * t_s
    w_b = gamma_c * b * d
    w_d = (w_s + q_sd) * s + w_b
    w_l = q_lr * s
    w_u = max(1.4 * w_d, 1.2 * w_d + 1.6 * w_l)
    M_u = w_u * L**2 / 8
    V_u = w_u * L / 2
    beta_1 = 0.85 if f_c <= 28e6 else max(0.85 - 0.05 * (f_c - 28e6) / 7e6, 0.65)
    a = A_s * f_y / (0.85 * f_c * b)
    x = a / beta_1
    eps_t = 0.003 * (d - x) / x
    phi = 0.9 if eps_t >= 0.005 else max(0.65 + (eps_t - 0.002) * 250 / 3, 0.65)
    M_n = A_s * f_y * (d - a / 2)
    M_c = phi * M_n
    u_M = M_u / M_c
    E_c = 4700 * math.sqrt(f_c / 1e6) * 1e6
    n_e = E_s / E_c
    r_s = A_s / (b * d)
    k = math.sqrt(2 * r_s * n_e + (r_s * n_e) ** 2) - r_s * n_e
    I_cr = b * (k * d) ** 3 / 3 + n_e * A_s * (d - k * d) ** 2
    v_d = 5 * (w_d + w_l) * L**4 / (384 * E_c * I_cr)
    u_v = v_d / (L / 240)
    P_u = n * (1.2 * w_d + 1.6 * w_l) * L + abs(N_w)
    A_g = c**2
    u_P = P_u / (0.52 * (0.85 * f_c * (A_g - A_s) + f_y * A_s))
    l_r = L / 2 / math.cos(theta)
    return (K_h, q_h, p_w, p_l, p_i, p_net, p_max, V_w, M_w, N_w, A_T, A_I, R_L, q_lr, w_s, w_b,
            w_d, w_l, w_u, M_u, V_u, beta_1, a, x, eps_t, phi, M_n, M_c, u_M, E_c, n_e, r_s, k,
            I_cr, v_d, u_v, P_u, A_g, u_P, l_r)  # fmt: skip


def on_arrays(
    V: Array, rho: Array, K_zt: Array, K_d: Array, h: Array, z_g: Array, alpha: Array, G: Array,
    C_w: Array, C_l: Array, GC_pi: Array, L: Array, s: Array, t_s: Array, gamma_c: Array,
    q_sd: Array, q_l: Array, K_LL: Array, n: Array, b: Array, d: Array, f_c: Array, f_y: Array,
    A_s: Array, E_s: Array, theta: Array, c: Array,
) -> tuple[Array, ...]:  # fmt: skip
    """Compute the 40 lines for many cases as one would on numpy arrays in coherent SI."""
    K_h = 2.01 * (np.maximum(h, 4.6) / z_g) ** (2 / alpha)
    q_h = 0.5 * rho * K_h * K_zt * K_d * V**2
    p_w = q_h * G * C_w
    p_l = q_h * G * C_l
    p_i = q_h * GC_pi
    p_net = p_w - p_l
    p_max = np.maximum(p_w + p_i, p_net)
    V_w = p_net * s * h
    M_w = V_w * h / 2
    N_w = M_w / L
    A_T = L * s
    A_I = K_LL * A_T
    R_L = np.where(A_I > 37.2, np.maximum(0.25 + 4.57 / np.sqrt(A_I), 0.4), 1.0)
    q_lr = R_L * q_l
    w_s = gamma_c * t_s
    w_b = gamma_c * b * d
    w_d = (w_s + q_sd) * s + w_b
    w_l = q_lr * s
    w_u = np.maximum(1.4 * w_d, 1.2 * w_d + 1.6 * w_l)
    M_u = w_u * L**2 / 8
    V_u = w_u * L / 2
    beta_1 = np.where(f_c <= 28e6, 0.85, np.maximum(0.85 - 0.05 * (f_c - 28e6) / 7e6, 0.65))
    a = A_s * f_y / (0.85 * f_c * b)
    x = a / beta_1
    eps_t = 0.003 * (d - x) / x
    phi = np.where(eps_t >= 0.005, 0.9, np.maximum(0.65 + (eps_t - 0.002) * 250 / 3, 0.65))
    M_n = A_s * f_y * (d - a / 2)
    M_c = phi * M_n
    u_M = M_u / M_c
    E_c = 4700 * np.sqrt(f_c / 1e6) * 1e6
    n_e = E_s / E_c
    r_s = A_s / (b * d)
    k = np.sqrt(2 * r_s * n_e + (r_s * n_e) ** 2) - r_s * n_e
    I_cr = b * (k * d) ** 3 / 3 + n_e * A_s * (d - k * d) ** 2
    v_d = 5 * (w_d + w_l) * L**4 / (384 * E_c * I_cr)
    u_v = v_d / (L / 240)
    P_u = n * (1.2 * w_d + 1.6 * w_l) * L + np.abs(N_w)
    A_g = c**2
    u_P = P_u / (0.52 * (0.85 * f_c * (A_g - A_s) + f_y * A_s))
    l_r = L / 2 / np.cos(theta)
    return (K_h, q_h, p_w, p_l, p_i, p_net, p_max, V_w, M_w, N_w, A_T, A_I, R_L, q_lr, w_s, w_b,
            w_d, w_l, w_u, M_u, V_u, beta_1, a, x, eps_t, phi, M_n, M_c, u_M, E_c, n_e, r_s, k,
            I_cr, v_d, u_v, P_u, A_g, u_P, l_r)  # fmt: skip


def on_quantities(registry: pint.UnitRegistry[Any]) -> Callable[..., tuple[Any, ...]]:
    """Return the 40 lines as one would write them on pint quantities, constants made once."""
    least_height, root_length = registry.Quantity(4.6, "m"), registry.Quantity(4.57, "m")
    least_area = registry.Quantity(37.2, "m**2")
    MPa = registry.MPa
    mild, step = 28 * MPa, 7 * MPa

    def lines(
        V: Any, rho: Any, K_zt: Any, K_d: Any, h: Any, z_g: Any, alpha: Any, G: Any,
        C_w: Any, C_l: Any, GC_pi: Any, L: Any, s: Any, t_s: Any, gamma_c: Any,
        q_sd: Any, q_l: Any, K_LL: Any, n: Any, b: Any, d: Any, f_c: Any, f_y: Any,
        A_s: Any, E_s: Any, theta: Any, c: Any,
    ) -> tuple[Any, ...]:  # fmt: skip
        K_h = 2.01 * (max(h, least_height) / z_g) ** (2 / alpha)
        q_h = 0.5 * rho * K_h * K_zt * K_d * V**2
        p_w = q_h * G * C_w
        p_l = q_h * G * C_l
        p_i = q_h * GC_pi
        p_net = p_w - p_l
        p_max = max(p_w + p_i, p_net)
        V_w = p_net * s * h
        M_w = V_w * h / 2
        N_w = M_w / L
        A_T = L * s
        A_I = K_LL * A_T
        R_L = max(0.25 + root_length / A_I**0.5, 0.4) if least_area < A_I else 1.0
        q_lr = R_L * q_l
        w_s = gamma_c * t_s
        w_b = gamma_c * b * d
        w_d = (w_s + q_sd) * s + w_b
        w_l = q_lr * s
        w_u = max(1.4 * w_d, 1.2 * w_d + 1.6 * w_l)
        M_u = w_u * L**2 / 8
        V_u = w_u * L / 2
        beta_1 = 0.85 if f_c <= mild else max(0.85 - 0.05 * (f_c - mild) / step, 0.65)
        a = A_s * f_y / (0.85 * f_c * b)
        x = a / beta_1
        eps_t = 0.003 * (d - x) / x
        phi = 0.9 if eps_t >= 0.005 else max(0.65 + (eps_t - 0.002) * 250 / 3, 0.65)
        M_n = A_s * f_y * (d - a / 2)
        M_c = phi * M_n
        u_M = M_u / M_c
        E_c = 4700 * math.sqrt(f_c.m_as(MPa)) * MPa
        n_e = E_s / E_c
        r_s = A_s / (b * d)
        k = (2 * r_s * n_e + (r_s * n_e) ** 2) ** 0.5 - r_s * n_e
        I_cr = b * (k * d) ** 3 / 3 + n_e * A_s * (d - k * d) ** 2
        v_d = 5 * (w_d + w_l) * L**4 / (384 * E_c * I_cr)
        u_v = v_d / (L / 240)
        P_u = n * (1.2 * w_d + 1.6 * w_l) * L + abs(N_w)
        A_g = c**2
        u_P = P_u / (0.52 * (0.85 * f_c * (A_g - A_s) + f_y * A_s))
        l_r = L / 2 / math.cos(theta)
        return (K_h, q_h, p_w, p_l, p_i, p_net, p_max, V_w, M_w, N_w, A_T, A_I, R_L, q_lr, w_s, w_b,
                w_d, w_l, w_u, M_u, V_u, beta_1, a, x, eps_t, phi, M_n, M_c, u_M, E_c, n_e, r_s, k,
                I_cr, v_d, u_v, P_u, A_g, u_P, l_r)  # fmt: skip

    return lines
