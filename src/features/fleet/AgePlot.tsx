import { useEffect, useRef, useState } from 'react';
import { Link } from 'react-router-dom';
import type { FleetDot } from '../../../shared/api/fleet.ts';
import { AUDIENCES } from '../../../shared/rules/permissions.ts';
import { ageLabel } from '../../components/ageScaleTicks.ts';
import { Flag } from '../../components/Flag.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Scale } from '../../components/Scale.tsx';
import { cx } from '../../lib/cx.ts';
import { visibleText } from '../../lib/safeText.ts';
import { lanes, plotAxis, plotX, swarm } from './plotLayout.ts';

const ROW = 66;
const RADIUS = 5;
const TARGET = 12;

/** The width of an element, in pixels, as it changes. */
function useWidth() {
  const element = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(0);
  useEffect(() => {
    if (!element.current) return;
    const observer = new ResizeObserver(([entry]) => setWidth(Math.floor(entry?.contentRect.width ?? 0)));
    observer.observe(element.current);
    return () => observer.disconnect();
  }, []);
  return { element, width };
}

const FRACTIONS = [
  { ratio: 0.25, label: '¼' },
  { ratio: 0.5, label: '½' },
  { ratio: 0.75, label: '¾' },
];

function dotWords(dot: FleetDot): string {
  const { exposedCount, audience, ageDays, limitDays } = dot;
  const held =
    exposedCount === 0
      ? ''
      : exposedCount === 1
        ? ', 1 person who has left still holds it'
        : `, ${exposedCount} people who have left still hold it`;
  return `${visibleText(dot.vesselName)}, ${audience}: ${ageLabel(ageDays)} old, limit ${limitDays} days${held}`;
}

/**
 * Every network's age against its own limit, one row an audience. Within the limit a dot, past it a magenta mark that
 * can be pointed at, reached by keyboard and followed to its vessel; the worst of each row is named.
 */
export function AgePlot({ dots }: { dots: readonly FleetDot[] }) {
  const { element, width } = useWidth();
  const axis = plotAxis(
    width,
    dots.map((dot) => dot.ratio),
  );
  const doublings = Array.from({ length: Math.log2(axis.end) }, (_, index) => 2 ** (index + 1));
  const limitX = plotX(axis, 1);
  const narrow = width < 420;
  const step = plotX(axis, 2) - limitX;
  // Labels that would run into each other are left out; the end is always said.
  const labelled = doublings.filter(
    (times) => times === axis.end || (step >= 44 && (narrow || step >= 95 || times < axis.end / 2)),
  );
  const pastLimit = dots.filter((dot) => dot.ratio > 1).length;
  return (
    <figure className="m-0 grid grid-cols-1 gap-x-6 sm:grid-cols-[7rem_1fr]">
      <figcaption className="sr-only">
        The age of each of {dots.length} networks against its own limit; {pastLimit} are past it. The table
        below has the same figures.
      </figcaption>
      <div className="hidden sm:block" style={{ paddingTop: 12 }}>
        {AUDIENCES.map((audience) => (
          <div key={audience} className="flex items-center text-sm" style={{ height: ROW }}>
            <Flag audience={audience} />
          </div>
        ))}
      </div>
      <div ref={element} className="relative min-w-0 pt-3">
        {width > 0
          ? AUDIENCES.map((audience) => {
              const mine = dots.filter((dot) => dot.audience === audience);
              const xOf = (edge: number) => (dot: FleetDot) =>
                Math.min(width - edge, Math.max(edge, plotX(axis, dot.ratio)));
              const within = swarm(
                mine.filter((dot) => dot.ratio <= 1),
                xOf(RADIUS + 1),
                RADIUS,
                ROW - 4,
              );
              // Marks that can be pressed keep a finger's distance (WCAG 2.2, 2.5.8: 24 px).
              const past = lanes(
                mine.filter((dot) => dot.ratio > 1),
                xOf(TARGET),
                TARGET * 2 + 1,
              );
              const worst = past.reduce<(typeof past)[number] | null>(
                (top, one) => (one.item.ratio > Math.max(1, top?.item.ratio ?? 0) ? one : top),
                null,
              );
              return (
                <div key={audience}>
                  <p className="py-1 text-sm sm:hidden">
                    <Flag audience={audience} />
                  </p>
                  <div className="relative border-b border-rule" style={{ height: ROW }}>
                    <span className="absolute inset-y-0 left-0 bg-shoal" style={{ width: limitX }} />
                    <svg width={width} height={ROW} aria-hidden="true" className="absolute inset-0">
                      {within.map(({ item, x, y }) => (
                        <circle
                          key={item.networkId}
                          cx={x}
                          cy={ROW / 2 + y}
                          r={RADIUS}
                          className="fill-paper stroke-ink"
                          strokeWidth={1}
                        >
                          <title>{dotWords(item)}</title>
                        </circle>
                      ))}
                    </svg>
                    {past.map(({ item, x, y }) => (
                      <Link
                        key={item.networkId}
                        to={`/fleet/vessels/${item.vesselId}`}
                        title={dotWords(item)}
                        aria-label={dotWords(item)}
                        className="absolute grid size-6 place-items-center rounded-full"
                        style={{ left: x - 12, top: ROW / 2 + y - 12 }}
                      >
                        <span className="size-[11px] rounded-full bg-magenta" />
                      </Link>
                    ))}
                    {worst && !narrow ? (
                      <span
                        aria-hidden="true"
                        className={cx(
                          'pointer-events-none absolute text-xs whitespace-nowrap',
                          worst.x > width * 0.8 && '-translate-x-full',
                        )}
                        style={{
                          left: worst.x + (worst.x > width * 0.8 ? 6 : -6),
                          top: ROW / 2 + worst.y - 25,
                        }}
                      >
                        <SafeText>{worst.item.vesselName}</SafeText>, {ageLabel(worst.item.ageDays)}
                      </span>
                    ) : null}
                  </div>
                </div>
              );
            })
          : null}
        <span className="absolute top-0 bottom-9 w-0.5 bg-magenta" style={{ left: limitX - 1 }} />
        <span className="absolute -top-1 text-xs font-medium text-magenta" style={{ left: limitX + 6 }}>
          limit
        </span>
        <Scale segments={24} boxed className="mt-1 h-2" />
        <div aria-hidden="true" className="relative h-6 text-[0.6875rem] text-soft">
          <span className="absolute top-1.5 left-0">new</span>
          {FRACTIONS.map(({ ratio, label }) => (
            <span
              key={label}
              className="absolute top-1.5 -translate-x-1/2"
              style={{ left: plotX(axis, ratio) }}
            >
              {label}
            </span>
          ))}
          <span className="absolute top-1.5 -translate-x-1/2" style={{ left: limitX }}>
            limit
          </span>
          {labelled.map((times) => (
            <span
              key={times}
              className={cx(
                'absolute top-1.5 whitespace-nowrap',
                times === axis.end ? '-translate-x-full' : '-translate-x-1/2',
              )}
              style={{ left: plotX(axis, times) }}
            >
              {times} ×{times === axis.end && !narrow ? ' the limit' : ''}
            </span>
          ))}
        </div>
      </div>
    </figure>
  );
}
