import tseslint from 'typescript-eslint';

export default tseslint.config(
  { ignores: ['dist/**', 'out/**', 'node_modules/**'] },
  ...tseslint.configs.recommended,
  {
    files: ['**/*.{ts,tsx}'],
    rules: {
      '@typescript-eslint/no-explicit-any': 'error',
      '@typescript-eslint/consistent-type-imports': 'error',
      'no-restricted-properties': [
        'error',
        { object: 'Math', property: 'random', message: 'Use a seeded stream of src/math/random.ts.' },
      ],
      eqeqeq: ['error', 'always'],
    },
  },
  {
    // The core touches no console and no clock; only the faces and the tools do.
    files: ['src/{math,units,formula,model,field,scene,ray,sky,measure,infer,files,figure}/**/*.ts'],
    rules: {
      'no-console': 'error',
      'no-restricted-globals': ['error', 'document', 'window', 'process', 'Date', 'performance'],
    },
  },
);
