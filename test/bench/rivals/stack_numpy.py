"""The yardstick in numpy for the optics benches: the problems of stack.c (see there for the protocol) as array programs.

KIND is "whole" (one stack at a time, vectorised over wavelengths), "batch" (all stacks in one array program),
"thicknesses" (interfaces worked out beforehand, all thicknesses in one array program) or "map".

Everything is worked out from n, k, thickness and wavelength, in complex arrays with wavelengths along the last axis. Here
N = n + ik (time factor exp(-iwt)), so that the principal square root is the wave that dies inwards.
"""

import sys
import time

import numpy as np

# Stacks in one array: large enough that calling numpy costs little, small enough for the cache.
CHUNK = 25


def interface(light, index_a, q_a, index_b, q_b):
    """Fresnel coefficient of light going from a to b; the p form is multiplied out by both q."""
    if light == "p":
        q_a, q_b = index_a * index_a * q_b, index_b * index_b * q_a
    return (q_a - q_b) / (q_a + q_b)


def stack_reflectance(wave, incidence, angle, indices, thickness, lights):
    """Reflectance of one stack, or of many at once when thickness and indices have a stack axis before the last.

    indices: complex, media from the first layer to the substrate along the first axis; thickness: layers along the first.
    """
    first = incidence.astype(complex)
    if angle.any():
        along = (incidence * np.sin(angle)) ** 2
        q_first = np.sqrt(first * first - along)
        q = np.sqrt(indices * indices - along)
    else:
        lights = lights[:1]
        q_first, q = first, indices
    turned = np.exp((4j * np.pi / wave) * q[:-1] * thickness)
    total = 0
    for light in lights:
        back = 0
        for j in range(len(indices) - 1, -1, -1):
            above = (indices[j - 1], q[j - 1]) if j else (first, q_first)
            r = interface(light, *above, indices[j], q[j])
            back = r if j == len(indices) - 1 else (r + back) / (1 + r * back)
            if j:
                back = back * turned[j - 1]
        total = total + back.real**2 + back.imag**2
    return total / len(lights)


class Whole:
    def __init__(self, problem):
        self.p = problem

    def __call__(self):
        p = self.p
        return np.array(
            [stack_reflectance(p.wave, p.incidence, p.angle, p.indices, d[:, None], p.lights) for d in p.thickness]
        )


class Batch:
    """Every stack brings its own indices, as in one call a stack; only the loop over stacks is numpy's."""

    def __init__(self, problem):
        p = self.p = problem
        shape = (len(p.indices), len(p.thickness), len(p.wave))
        self.indices = np.broadcast_to(p.indices[:, None, :], shape).copy()
        self.thickness = p.thickness.T[:, :, None].copy()

    def __call__(self):
        p = self.p
        count = len(p.thickness)
        return np.concatenate(
            [
                stack_reflectance(p.wave, p.incidence, p.angle, self.indices[:, at], self.thickness[:, at], p.lights)
                for at in (slice(first, first + CHUNK) for first in range(0, count, CHUNK))
            ]
        )


class Thicknesses:
    """Interfaces and turns kept; the work is the phases and the recursion."""

    def __init__(self, problem):
        p = problem
        media = np.concatenate([p.incidence[None, :].astype(complex), p.indices])
        along = (p.incidence * np.sin(p.angle)) ** 2
        q = np.sqrt(media * media - along)
        self.turn = (4j * np.pi / p.wave) * q[1:-1]
        lights = p.lights if p.angle.any() else p.lights[:1]
        self.bounces = [
            [interface(light, media[j], q[j], media[j + 1], q[j + 1]) for j in range(len(media) - 1)]
            for light in lights
        ]
        self.thickness = p.thickness.T[:, :, None].copy()

    def spectra(self, thickness):
        turned = [np.exp(turn * d) for turn, d in zip(self.turn, thickness)]
        total = 0
        for bounces in self.bounces:
            # |X|^2 / |Y|^2 at the end: no complex division on the way.
            up, down = bounces[-1], 1
            for j in range(len(turned) - 1, -1, -1):
                back = up * turned[j]
                up, down = bounces[j] * down + back, down + bounces[j] * back
            total = total + (up.real**2 + up.imag**2) / (down.real**2 + down.imag**2)
        return total / len(self.bounces)

    def __call__(self):
        count = self.thickness.shape[1]
        return np.concatenate([self.spectra(self.thickness[:, first : first + CHUNK]) for first in range(0, count, CHUNK)])


class Map:
    """A row is one film, all its thicknesses and wavelengths one array that stays in the cache.

    The phases of the equally spaced thicknesses are products of a coarse and a fine rotation, so that a row needs the
    exponentials of some thirty thicknesses.
    """

    def __init__(self, problem):
        self.p = problem
        steps = problem.steps
        self.fine = max(1, int(np.sqrt(steps)))
        self.coarse = -(-steps // self.fine)

    def row(self, film):
        p = self.p
        first = p.incidence.astype(complex)
        along = (p.incidence * np.sin(p.angle)) ** 2
        q0, q1, q2 = (np.sqrt(index * index - along) for index in (first, film, p.substrate))
        turn = (4j * np.pi / p.wave) * q1
        coarse = np.exp(turn * (p.first_nm + p.step_nm * self.fine * np.arange(self.coarse))[:, None])
        fine = np.exp(turn * (p.step_nm * np.arange(self.fine))[:, None])
        fine_re, fine_im = fine.real.copy(), fine.imag.copy()
        fine_size = fine_re**2 + fine_im**2
        lights = p.lights if p.angle.any() else p.lights[:1]
        total = 0
        for light in lights:
            a = interface(light, first, q0, film, q1)
            b = interface(light, film, q1, p.substrate, q2)
            # Real and imaginary parts apart: complex arrays would be read with gaps. same = 2 Re a Re B, cross = 2 Im a Im B.
            start = (coarse * b)[:, None, :]
            same = (2 * a.real * start.real) * fine_re
            same -= (2 * a.real * start.imag) * fine_im
            cross = (2 * a.imag * start.real) * fine_im
            cross += (2 * a.imag * start.imag) * fine_re
            size = (start.real**2 + start.imag**2) * fine_size
            a_size = a.real**2 + a.imag**2
            up = size + a_size
            up += same
            up += cross
            size *= a_size
            size += 1
            size += same
            size -= cross
            up /= size
            total = total + (up @ p.weight).ravel()[: p.steps]
        return total / len(lights)

    def __call__(self):
        return np.array([self.row(film) for film in self.p.films])


class Problem:
    def __init__(self, lines):
        kind, _, one, two, _, light = next(lines).split()
        self.kind = kind
        self.lights = ["s", "p"] if light == "both" else [light]

        def numbers():
            return np.array(next(lines).split(), float)

        def index():
            return numbers() + 1j * numbers()

        self.wave, self.incidence, self.angle = numbers(), numbers(), numbers()
        if kind == "map":
            self.weight = numbers()
            self.substrate = index()
            self.first_nm, self.step_nm = numbers()
            self.steps = int(two)
            self.films = [index() for _ in range(int(one))]
        else:
            self.indices = np.array([index() for _ in range(int(one) + 1)])
            self.thickness = np.array([numbers() for _ in range(int(two))])


def main():
    lines = iter(sys.stdin.readline, "")
    problem = Problem(lines)
    work = {"whole": Whole, "batch": Batch, "thicknesses": Thicknesses, "map": Map}[problem.kind](problem)
    result = np.zeros(1)
    for line in lines:
        word, *rest = line.split()
        if word == "go":
            started = time.perf_counter_ns()
            for _ in range(int(rest[0])):
                result = work()
            print(time.perf_counter_ns() - started, repr(float(result.sum())), flush=True)
        elif word == "answer":
            print(" ".join(f"{value:.17g}" for value in result.ravel()), flush=True)
        else:
            sys.exit("commands are go N and answer")


main()
