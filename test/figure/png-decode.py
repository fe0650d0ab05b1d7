# Decodes an 8-bit PNG (palette or RGBA) from standard input with zlib alone, checking every CRC; prints JSON.
import json, struct, sys, zlib

data = sys.stdin.buffer.read()
assert data[:8] == b'\x89PNG\r\n\x1a\n'
at, chunks = 8, {}
while at < len(data):
    (length,) = struct.unpack('>I', data[at:at + 4])
    kind, body = data[at + 4:at + 8], data[at + 8:at + 8 + length]
    (crc,) = struct.unpack('>I', data[at + 8 + length:at + 12 + length])
    assert crc == zlib.crc32(kind + body), kind
    chunks[kind] = chunks.get(kind, b'') + body
    at += 12 + length
width, height, bits, colour = struct.unpack('>IIBB', chunks[b'IHDR'][:10])
assert bits == 8 and list(chunks)[-1] == b'IEND'
size = {3: 1, 6: 4, 2: 3}[colour]
raw, stride = zlib.decompress(chunks[b'IDAT']), width * size
assert len(raw) == (stride + 1) * height
rows, above = [], bytearray(stride)
for y in range(height):
    kind, line = raw[y * (stride + 1)], bytearray(raw[y * (stride + 1) + 1:(y + 1) * (stride + 1)])
    for k in range(stride):
        a = line[k - size] if k >= size else 0
        b = above[k]
        c = above[k - size] if k >= size else 0
        p = a + b - c
        paeth = min((a, b, c), key=lambda v: abs(p - v))
        line[k] = (line[k] + [0, a, b, (a + b) // 2, paeth][kind]) & 255
    rows.append(list(line))
    above = line
print(json.dumps({'width': width, 'height': height, 'size': size, 'rows': rows,
                  'palette': list(chunks.get(b'PLTE', b'')), 'transparency': list(chunks.get(b'tRNS', b''))}))
