import { useEffect, useState } from 'react';
import { cx } from '../lib/cx.ts';
import { type QrMatrix, QUIET_ZONE, qrPath } from './qrPath.ts';

interface QrCodeProps {
  /** What the code says. */
  text: string;
  /** Read out in place of the picture; must not hold what the code says. */
  label: string;
  className?: string;
}

/**
 * A QR code, error correction M, always dark on light with its quiet zone: at night on a dimmed tile, because
 * phones do not read light on dark. The encoder is fetched when the first code is shown.
 */
export function QrCode({ text, label, className }: QrCodeProps) {
  const [matrix, setMatrix] = useState<QrMatrix | null>(null);
  const [failed, setFailed] = useState(false);
  useEffect(() => {
    let wanted = true;
    setMatrix(null);
    setFailed(false);
    import('qrcode')
      .then(({ create }) => {
        if (wanted) setMatrix(create(text, { errorCorrectionLevel: 'M' }).modules);
      })
      .catch(() => {
        if (wanted) setFailed(true);
      });
    return () => {
      wanted = false;
    };
  }, [text]);

  if (failed) {
    return (
      <p role="alert">The code could not be drawn. Read the words out instead, or load the page again.</p>
    );
  }
  const side = (matrix?.size ?? 33) + 2 * QUIET_ZONE;
  return (
    <svg
      viewBox={`0 0 ${side} ${side}`}
      role="img"
      aria-label={label}
      shapeRendering="crispEdges"
      className={cx('block aspect-square bg-card', className)}
    >
      {matrix ? <path d={qrPath(matrix)} className="fill-card-ink" /> : null}
    </svg>
  );
}
