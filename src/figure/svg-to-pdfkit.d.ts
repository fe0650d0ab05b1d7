declare module 'svg-to-pdfkit' {
  /** Draws SVG text into a PDF document at (x, y), in its units. */
  export default function svgToPdf(
    document: unknown,
    svg: string,
    x: number,
    y: number,
    options: {
      readonly assumePt?: boolean;
      readonly width?: number;
      readonly height?: number;
      readonly fontCallback?: (family: string, bold: boolean, italic: boolean, options: { fauxBold?: boolean; fauxItalic?: boolean }) => string;
      readonly warningCallback?: (warning: string) => void;
    },
  ): void;
}
