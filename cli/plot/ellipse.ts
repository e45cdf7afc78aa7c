/**
 * The ellipse on the index-thickness plane that holds a film with 95 % probability, when index and thickness are jointly
 * normal: points at a fixed Mahalanobis distance from the mean.
 */
import type { FilmPoint } from "../../recipes/index.ts";

/** Squared distance holding 95 %: the 0.95 quantile of chi-square with 2 degrees of freedom, -2 ln 0.05. */
const squaredDistance = -2 * Math.log(0.05);

/** The point at an angle (radians, of the unit circle before stretching): mean + r L (cos, sin), L the Cholesky factor. */
export function ellipseAt(film: FilmPoint, angleRad: number): [number, number] {
  const [varIndex, covariance, varThickness] = film.covariance;
  const r = Math.sqrt(squaredDistance);
  const a = Math.sqrt(Math.max(0, varIndex));
  const b = a > 0 ? covariance / a : 0;
  const c = Math.sqrt(Math.max(0, varThickness - b * b));
  return [
    film.index + r * a * Math.cos(angleRad),
    film.thicknessNm + r * (b * Math.cos(angleRad) + c * Math.sin(angleRad)),
  ];
}

/** Half the extent of the ellipse along each axis. */
export function ellipseHalf(film: FilmPoint): { index: number; thicknessNm: number } {
  return {
    index: Math.sqrt(squaredDistance * Math.max(0, film.covariance[0])),
    thicknessNm: Math.sqrt(squaredDistance * Math.max(0, film.covariance[2])),
  };
}
