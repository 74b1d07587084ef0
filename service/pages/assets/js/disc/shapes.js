// Path data of what is drawn many times or turned into place, in millimetres, y downwards.
const DEG = 180 / Math.PI;

// The opening of one projection in its own frame: x outwards along the radius, y against the anticlockwise tangent.
export function openingPath(movement) {
  const { points_mm, bulges, square_at_mm } = movement.pattern;
  const at = points_mm.map(([u, v]) => [v, movement.direction * (u - square_at_mm)]);
  const parts = [`M${pair(at[0])}`];
  at.forEach((point, place) => {
    const next = at[(place + 1) % at.length];
    const bulge = bulges[place];
    if (!bulge) {
      if (place + 1 < at.length) parts.push(`L${pair(next)}`);
      return;
    }
    const chord = Math.hypot(next[0] - point[0], next[1] - point[1]);
    const radius = (chord * (1 + bulge * bulge)) / (4 * Math.abs(bulge));
    // DXF counts bulges anticlockwise; this frame mirrors a clockwise disc's.
    const sweep = bulge > 0 === movement.direction < 0 ? 1 : 0;
    parts.push(`A${fine(radius)} ${fine(radius)} 0 ${Math.abs(bulge) > 1 ? 1 : 0} ${sweep} ${pair(next)}`);
  });
  return `${parts.join("")}Z`;
}

// Puts that frame where a working edge lies; see layout/mechanics/frame.py.
export function frameAt(radius_mm, angle_deg, movement) {
  const ahead = movement.pattern.square_at_mm;
  const stands = Math.sqrt(Math.max(radius_mm * radius_mm - ahead * ahead, 0));
  const turned = angle_deg - movement.direction * Math.asin(ahead / radius_mm) * DEG;
  return `rotate(${fine(-turned)})translate(${fine(stands)} 0)`;
}

// All working edges as one path, already in place.
export function edgesPath(projections, movement) {
  const half = movement.pattern.width_mm / 2;
  const parts = [];
  for (const { radius_mm, angle_deg } of projections) {
    const cos = Math.cos(angle_deg / DEG);
    const sin = Math.sin(angle_deg / DEG);
    parts.push(`M${pair([(radius_mm - half) * cos, -(radius_mm - half) * sin])}`);
    parts.push(`L${pair([(radius_mm + half) * cos, -(radius_mm + half) * sin])}`);
  }
  return parts.join("");
}

export const circlePath = (radius) =>
  `M${fine(radius)} 0A${fine(radius)} ${fine(radius)} 0 1 0 ${fine(-radius)} 0` +
  `A${fine(radius)} ${fine(radius)} 0 1 0 ${fine(radius)} 0Z`;

export const fine = (value) => String(Math.round(value * 1000) / 1000);
const pair = ([x, y]) => `${fine(x)} ${fine(y)}`;
