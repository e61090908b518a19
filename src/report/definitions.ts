import { markup } from './markup.ts';

/** What the figures of a report are, each with its formula: one wording for reports and the page's help. */
export const DEFINITIONS = markup`<h2>What the figures are</h2>
<dl>
<dt>relative L2</dt><dd>√(Σ |grid − exact|²) / √(Σ |exact|²) over instants and the three components of a field, each at its own place and time.</dd>
<dt>boundary</dt><dd>Grid solver in its box minus the same grid without walls: what the walls sent back.</dd>
<dt>lattice</dt><dd>Grid solver without walls minus the exact field of the currents it was given: dispersion, near field and time stepping of the lattice.</dd>
<dt>gridding</dt><dd>Exact field of the currents on the grid’s edges minus that of the designed source.</dd>
<dt>quadrature</dt><dd>The integral as computed minus its closed form; where there is none, its bound is its floor.</dd>
<dt>share</dt><dd>⟨part, total⟩ / ⟨total, total⟩, signed; the shares of the parts sum to 1.</dd>
<dt>floor</dt><dd>What a figure cannot be told from: rounding, the free-space run’s own leftover, the quadrature’s bound. A part below it is shown as “&lt; floor”.</dd>
<dt>closest distance</dt><dd>The smallest distance to a source from which 95 % of the points in every distance bin, outward to the best, are within the tolerance; without walls.</dd>
<dt>farthest distance</dt><dd>Where the lattice’s dispersion alone reaches the tolerance, in the worst direction that radiates; “extrapolated” beyond the box, and only where prediction and measurement agree within 1.4.</dd>
<dt>wall clearance</dt><dd>The distance to the walls within which more than 5 % of the points exceed the tolerance.</dd>
<dt>band</dt><dd>Up to the first of two consecutive sixth-octave bands whose vector ratio exceeds the tolerance; bands within 40 dB of the strongest and 10 dB above the floor count; both signals with the same taper at the end.</dd>
<dt>shift, amplitude</dt><dd>Lag and height of the cross-correlation of the two signals’ increments; a positive shift is a late grid.</dd>
<dt>rise time</dt><dd>10 to 90 % of the strongest component’s peak, grid against exact.</dd>
<dt>static rest</dt><dd>Relative error of the field that charge leaves behind after the last arrival.</dd>
</dl>`;

/** What the figures of a judgement are. */
export const JUDGE_DEFINITIONS = markup`<h2>What the figures of a judgement are</h2>
<dl>
<dt>error</dt><dd>√(Σ |trace − exact|²) / √(Σ |exact|²) over instants and the components of a field that were given; the exact field at each trace’s own place and instants.</dd>
<dt>sound grid</dt><dd>The same for a Yee grid without a fault, by the closed form of its error at the nearest cell: lattice and gridding, and walls where they are predictable.</dd>
<dt>fitted</dt><dd>The offset and scale with which the exact field fits the trace best, and the error left then.</dd>
<dt>explains</dt><dd>How much of what is wrong a fault would account for: 1 − ‖trace − faulty‖² / ‖trace − sound‖², sound being the exact field or that of a sound grid, whichever is nearer, and faulty the same as it would be with the fault.</dd>
<dt>ADM, FDM, GDM</dt><dd>Amplitude, feature and global difference measures; below 0.1 excellent, 0.2 very good, 0.4 good, 0.8 fair, 1.6 poor. GRADE counts the grades from excellent on, SPREAD the neighbouring grades, that hold 85 % of the points.</dd>
</dl>`;

/** How to read what the page says, which lever to pull, and what an exact integral is silent about: the page's help. */
export const GUIDANCE = markup`<h2>How to read the verdict</h2>
<p>“Within 5 %: from … to …” names the distances from the source between which 95 % of the places in every distance bin are within the tolerance, for E and H: nearer, the grid does not resolve the source’s near field; farther, numerical dispersion adds up. “≥ … (box edge)” claims nothing beyond the box. “… off the walls” is how far to stay from them, “up to …” the frequency up to which the traces agree at the worst observer within those distances.</p>
<p>The four parts say which lever to pull. They add up to the total as signals, not in size: a part with a negative share cancels others. “&lt; … (floor)” is smaller than what can be told.</p>
<dl>
<dt>boundary</dt><dd>More layers, another wall, or more clearance to it.</dd>
<dt>lattice</dt><dd>A smaller cell.</dd>
<dt>gridding</dt><dd>A source that lies on grid lines, or a smaller cell.</dd>
<dt>quadrature</dt><dd>None: it is the integral’s own error.</dd>
</dl>
<p>Ladders &amp; walls measures these levers case by case, Plan predicts the cheapest set-up that meets a tolerance, and Judge holds the traces of another solver against the same exact field.</p>
<h2>What the integral cannot tell</h2>
<p>It is exact for currents that are known beforehand, in one homogeneous medium, along filaments without a radius. It tells nothing of scatterers, of materials inside the box, of currents that the field itself drives, or of the field at the surface of a thick wire. Not for compliance or safety decisions.</p>`;
